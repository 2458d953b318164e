// Two predictors of a candidate at once: every form, or the absence, of both.
#pragma once

#include "search/guided_elimination.hpp"
#include "search/guided_space.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::search {

class PairLook {
 public:
  PairLook(const GuidedSpace& space, const Objective& objective) : space_(space), objective_(objective) {}

  /// Scores, in the objective's units, of `base` (both predictors absent) with every pair of choices: entry
  /// c_first · (1 + forms of second) + c_second, absence included. Infinite where inseparable. Valid until the next
  /// look. Cost O(folds · k (k + columns of both)²).
  const std::vector<double>& look(const Choices& base, std::size_t first, std::size_t second);

 private:
  bool reduce(const ObjectiveFold& fold);
  double score(std::size_t first, std::size_t second);

  const GuidedSpace& space_;
  const Objective& objective_;
  /// A choice of one of the two predictors: where its columns stand among those in question.
  struct Option {
    std::size_t at, n_columns;
  };
  std::vector<std::size_t> columns_;  ///< in the Gram: those of the base, of the first, of the second
  std::size_t n_base_ = 0;
  std::vector<Option> options_[2];  ///< by choice, absence first
  SmallFold reduced_, small_;
  std::vector<std::size_t> picked_;
  const double* least_ = nullptr;
  std::vector<double> scores_;
};

}  // namespace formsieve::search

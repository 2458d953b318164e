// A look at the neighbours of a candidate: the scores of everything that one change reaches, from shared eliminations.
#pragma once

#include "search/guided_elimination.hpp"
#include "search/guided_space.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::search {

/// A set of choices and what it becomes with one more form. Scores are in the objective's units, infinite where
/// inseparable in a fold.
struct Extensions {
  Choices base;
  double base_score = 0.0;       ///< also where a predictor that is always in is missing
  std::span<const double> with;  ///< [GuidedSpace::forms()] with that form added; meaningless for predictors in `base`
};

class Look {
 public:
  /// The arguments must outlive it. Memory grows to the widest look and stays.
  Look(const GuidedSpace& space, const Objective& objective);

  /// All that `base` becomes with one more form. Cost O(folds · k² · columns) for k columns.
  Extensions extend(const Choices& base);
  /// The extensions of a candidate without each of its predictors, in plan order, then of the candidate itself: every
  /// single change and exchange. The eliminations are shared by halving (each half of the predictors is eliminated for
  /// all in the other half): O(folds · k² log k · columns). Valid until the next look.
  const std::vector<Extensions>& around(const Choices& candidate);

  const Objective& objective() const { return objective_; }

 private:
  void start(std::size_t n_bases);
  void halve(std::size_t first, std::size_t last, std::size_t depth);
  void add(std::size_t base, OpenState& state);
  void finish();
  OpenState& state(std::size_t depth);

  const GuidedSpace& space_;
  const Objective& objective_;
  std::vector<std::size_t> wide_;  ///< forms of several columns
  Elimination elimination_;
  std::vector<OpenState> states_;
  std::vector<const OpenForm*> present_;
  const double* least_ = nullptr;
  std::vector<double> sums_;       ///< [base][width]
  std::vector<double> wide_sums_;  ///< [base][wide form]
  std::vector<double> scores_;     ///< [base][form]
  std::vector<Extensions> bases_;
};

}  // namespace formsieve::search

// Room search: the space, its counting and numbering, the elimination walk, the pool. Knows nothing of files, text and
// statistics. May call: base.
#pragma once

#include <boost/multiprecision/cpp_int.hpp>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::search {

using BigCount = boost::multiprecision::cpp_int;

/// A pivot that is not above this share of its column's diagonal before any elimination is not divided by: the error of
/// a held-out sum is about 1e-16 over the smallest such share, hence at most 1e-8 (pivot_guard_test).
inline constexpr double kSmallestPivot_rel = 1e-8;

/// Where the columns of one form stand in the Gram.
struct FormBlock {
  std::size_t first_column = 0;
  std::size_t n_columns = 1;
};

struct PredictorChoices {
  std::vector<FormBlock> forms;
  bool always = false;  ///< absence is not a choice
};

/// All candidates: a response form and, for each predictor, a form or its absence.
struct Space {
  std::size_t n_responses = 1;
  std::vector<PredictorChoices> predictors;  ///< in plan order
  std::optional<std::size_t> max_terms;      ///< at most so many predictors present
};

/// One candidate: choice[j] = 0 for absence, 1 + form index otherwise.
struct Choice {
  std::size_t response = 0;
  std::vector<std::uint16_t> choice;  ///< [n_predictors]
  bool operator==(const Choice&) const = default;
};

/// Predictors present.
std::size_t n_terms(std::span<const std::uint16_t> choice);
/// Whether choices of the predictors make a candidate of the space: forms that exist, what is always in, max_terms.
bool admits(const Space& space, std::span<const std::uint16_t> choice);
/// Every predictor that is always in with its first form, no other; max_terms may have no room for it.
std::vector<std::uint16_t> least_choice(const Space& space);

/// Exact number of candidates (dynamic programme over max_terms).
BigCount count(const Space& space);
/// Candidates by number of predictors present, 0 … n_predictors.
std::vector<BigCount> count_by_terms(const Space& space);

/// Mixed-radix number: the response most significant, then the predictors in plan order; the radix of a predictor is 1
/// + forms, or forms when it is always in. Candidates beyond max_terms have numbers that do not occur.
BigCount number_of(const Space& space, const Choice& choice);
std::optional<Choice> choice_of(const Space& space, const BigCount& number);

}  // namespace formsieve::search

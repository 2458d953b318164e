// Which predictors stand behind candidates that the walk could not enter.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::search {

/// Two forms of different predictors that leave too little of each other in some fold, or one form that is constant
/// there (then both are the same).
struct InseparablePair {
  std::size_t first = 0, second = 0;                  ///< predictors in plan order, first ≤ second
  std::uint16_t first_choice = 1, second_choice = 1;  ///< the forms that are nearest to each other, 1 + form index
  std::size_t n_pairs_of_forms = 0;                   ///< of these two predictors that are inseparable
  double smallest_rel = 0.0;                          ///< share of a column that the other leaves, in the worst fold
};

/// All pairs of predictors with inseparable forms, in plan order. Candidates that are inseparable for a reason that
/// needs three predictors or more, or too few rows, have none. Cost: (folds + 1) · columns² operations.
std::vector<InseparablePair> inseparable_pairs(const Space& space, const base::GramSet& grams,
                                               double smallest_pivot_rel);

}  // namespace formsieve::search

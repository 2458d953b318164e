// A few good candidates of one response form without visiting the space: descent by single changes.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <stop_token>
#include <vector>

namespace formsieve::search {

struct DescentOptions {
  std::size_t keep = 25;            ///< candidates returned at most
  std::size_t most_moves = 40;      ///< changes made at most, each after a look at every single change
  unsigned threads = 0;             ///< 0: all that the process may use
  std::vector<std::uint16_t> from;  ///< empty: the least candidate
  std::stop_token stop;             ///< looked at between moves
};

/// All candidates that differ from one in the choice of a single predictor, in the order of predictors and choices.
std::vector<std::vector<std::uint16_t>> single_changes(const Space& space, const std::vector<std::uint16_t>& from);

/// Starts from the predictors that are always in, each in its first form, or from another candidate, and as long as
/// that lowers the held-out sum of squares (the form's scale, all folds) makes the best single change: a predictor
/// enters, leaves or takes another form. Returns the best of all candidates looked at, best first, ties by candidate
/// number; empty where none is separable. The same for any number of threads. Cost: O(folds · k³) per candidate of k
/// columns, and a move looks at every form of the space once.
std::vector<Choice> descend(const Space& space, const base::GramSet& grams, std::size_t response,
                            const DescentOptions& options);

}  // namespace formsieve::search

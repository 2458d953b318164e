// The walk over a part of the space: some predictors decided, some forms struck off.
//
// A predictor of which one form is left is one that is always in with that form, so that the outer tree brings it in
// before all others; one of which only absence is left is not there at all. What remains is a smaller space, walked
// like any other.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <limits>
#include <span>
#include <stop_token>
#include <vector>

namespace formsieve::search {

/// Candidates of one response form: all that choose one of these for every predictor (and keep to max_terms).
struct Subspace {
  std::size_t response = 0;
  std::vector<std::vector<std::uint16_t>> choices;  ///< [n_predictors] rising, at least one each; 0: absence
};

/// A listed candidate in the units of the Gram matrices.
struct Held {
  std::vector<std::uint16_t> choice;
  double cv_sse = 0.0;
  double rss = 0.0;
  std::size_t n_columns = 0;
};
/// Smaller cv_sse first, then smaller candidate number.
bool better_held(const Held& a, const Held& b);

struct SubspaceResult {
  std::vector<Held> best;  ///< best first
  std::uint64_t n_scored = 0;
  std::uint64_t n_inseparable = 0;
  bool complete = true;  ///< false when stopped
};

/// The `keep` best by cv_sse that are not above `limit`. The order in which forms are brought in is that of the
/// subspace, so that sums may differ from a walk over the whole space in their last digits. Cost besides the
/// candidates: about that of `decided + 1` eliminations in the matrices of all columns that are left.
SubspaceResult walk_subspace(const Space& space, const base::GramSet& grams, const Subspace& subspace, std::size_t keep,
                             double limit, std::stop_token stop = {});

/// The same candidates as the walk over the whole space scores them, to the last bit, best first. Of candidates that
/// the walk would not enter nothing is returned. Cost: a node of the walk for each.
std::vector<Held> scored_as_in_walk(const Space& space, const base::GramSet& grams, std::size_t response,
                                    std::span<const Held> candidates);

}  // namespace formsieve::search

// The best candidates by held-out error on the form's scale of a space too large to visit, exactly: the walk over what
// a bound on the residual sum of squares leaves of it.
//
// For each response form a tree over the predictors' choices (leaves.hpp) cuts every set of candidates whose RSS is
// bounded from below by more than the worst held-out sum of a full list allows (held_out.hpp), and what is left when
// sets are small is walked. The limit falls as the list improves. So the lists are those of the walk over every
// candidate. Its other results, the summaries of the whole space, are not made: of what is cut only a bound is known.
#pragma once

#include "base/gram.hpp"
#include "proof/bounded_start.hpp"
#include "proof/held_out.hpp"
#include "proof/leaves.hpp"
#include "search/space.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <span>
#include <stop_token>
#include <vector>

namespace formsieve::proof {

struct BoundedWalkOptions {
  std::size_t keep = 100;  ///< candidates listed for each response form
  unsigned threads = 0;    ///< 0: all that the process may use
  std::stop_token stop;
  std::function<bool()> enough;  ///< as proof::Limits::enough
  /// Share of the candidates of all response forms that are done with: visited or cut. Called between batches; may be
  /// empty.
  std::function<void(double share)> progress;
  StartEffort start;
  LeafEffort effort;
};

/// What has become of the candidates of one response form. n_scored + n_inseparable + n_cut + n_open is all of them.
struct BoundedCounts {
  std::uint64_t n_scored = 0;
  search::BigCount n_inseparable;  ///< below a form that could not be brought in
  search::BigCount n_cut;          ///< none of them is better than the last of the list
  search::BigCount n_open;         ///< not reached; 0 when complete
  std::uint64_t n_nodes = 0;       ///< of the tree
  std::uint64_t n_leaves = 0;      ///< walks
  std::uint64_t n_start = 0;       ///< candidates visited for the first limit; most of them are visited again
};

struct BoundedWalk {
  /// [response] the best by cv_sse, as search::WalkResult's, to the last bit. When not complete: the best met so far.
  /// Where pivots of a candidate straddle search::kSmallestPivot_rel depending on the order of its columns, it may be
  /// listed by one of the walks and not by the other.
  std::vector<std::vector<search::Scored>> lists;
  std::vector<BoundedCounts> counts;  ///< [response]
  bool complete = true;
};

/// `hints` are candidates known to be good; the more of them, and the better, the fewer visits. Predictors have at most
/// kMostForms forms. The same bits for any number of threads when complete. Cost: what the bound leaves, which depends
/// on the data (bounded_estimate.hpp), at about the walk's speed.
BoundedWalk bounded_walk(const search::Space& space, const base::GramSet& grams, const HeldOutRows& rows,
                         const BoundedWalkOptions& options, std::span<const search::Choice> hints = {});

/// The problem of a tree of leaves: no penalty, no constants. `space` and `grams` must outlive it.
Problem problem_of_leaves(const search::Space& space, const base::GramSet& grams);

}  // namespace formsieve::proof

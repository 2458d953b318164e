// What a bounded walk will cost, before it is made.
#pragma once

#include "base/gram.hpp"
#include "proof/bounded_walk.hpp"
#include "proof/held_out.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <span>
#include <vector>

namespace formsieve::proof {

/// Of one response form, with the limit that the walk starts from: as the limit falls during the walk, less will do.
struct VisitEstimate {
  double visits = 0.0;          ///< candidates to be walked
  double standard_error = 0.0;  ///< of it; 0 when the whole tree was seen
  double nodes = 0.0;           ///< of the tree
  double node_seconds = 0.0;    ///< one node took, by EstimateEffort::seconds and on the threads of the options
  std::size_t n_dives = 0;
};

struct EstimateEffort {
  std::size_t dives = 100;     ///< at most
  std::uint64_t nodes = 1000;  ///< worked on at most, but for the first two dives
  std::uint64_t seed = 20261201;
  std::function<double()> seconds;  ///< a clock; empty: nothing is timed
};

/// Dives into the tree of leaves (Knuth 1975, Estimating the efficiency of backtrack programs): at each node all
/// children are bounded, one is chosen with probability in proportion to what is left of it, and the sizes of the
/// leaves where dives end, over the probability of getting there, average to the candidates of all leaves. Nodes met
/// again are not worked on again, and once every node was met the answer is exact. The spread is that of the dives: a
/// rare part of the tree that none of them met is not in it. The same for any number of threads but for node_seconds.
/// `options`: keep, threads, stop, start and effort are read. A stop leaves infinite estimates.
std::vector<VisitEstimate> estimate_visits(const search::Space& space, const base::GramSet& grams,
                                           const HeldOutRows& rows, const BoundedWalkOptions& options,
                                           const EstimateEffort& effort, std::span<const search::Choice> hints = {});

}  // namespace formsieve::proof

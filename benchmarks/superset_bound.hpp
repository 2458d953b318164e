// The bounds that the proof replaces, as its benchmark's baselines.
#pragma once

#include "proof/problem.hpp"

#include <cstddef>
#include <cstdint>

namespace formsieve::bench {

/// What a node's RSS is bounded by: that of all its open columns fitted together, or that plus the largest over its
/// predictors of the least that going back to one form, or none, would add.
enum class Superset { plain, largest_drop };

struct SupersetProof {
  bool proved = false;
  std::uint64_t nodes = 0;
  std::size_t n_listed = 0;  ///< candidates met at or below the threshold
  double gap = 0.0;          ///< of the threshold over the lowest open node
};

/// Best-first branch and bound over the first response form, told the threshold that it has to prove: no time goes to
/// finding good candidates. Bounds of actions strike them off, small nodes are enumerated.
SupersetProof prove_by_superset(const proof::RootGram& root, Superset bound, double threshold, double seconds);

}  // namespace formsieve::bench

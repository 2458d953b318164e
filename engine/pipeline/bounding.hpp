// Held-out error with certainty in spaces too large to visit whole: whether the walk over what a bound leaves is worth
// its time, and what came of it.
#pragma once

#include "base/gram.hpp"
#include "pipeline/meter.hpp"
#include "pipeline/prepare.hpp"
#include "proof/bounded_walk.hpp"

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::pipeline {

struct BoundingLimits {
  std::size_t keep = 0;                ///< candidates listed for each response form
  double seconds = 0.0;                ///< for all of it
  double candidates_per_second = 0.0;  ///< of the walk, all threads
  unsigned threads = 0;
};

struct Bounded {
  std::optional<proof::BoundedWalk> walk;  ///< unset: not tried
  std::string words;                       ///< one sentence: what is certain, or why nothing is
};

/// Estimates the visits and, where they fit, makes the bounded walk. `hints`: candidates known to be good by held-out
/// error.
Bounded bound_and_walk(const Prepared& prepared, const base::GramSet& grams, const BoundingLimits& limits,
                       const std::vector<search::Choice>& hints, Meter& meter);

}  // namespace formsieve::pipeline

// The whole-space summary by plain sums over a list of every candidate: the oracle of the one that the walk makes.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "search/walk.hpp"

#include <vector>

namespace formsieve::test {

/// Every candidate that a walk can score, [response], from lists long enough for all of them. Candidates that the walk
/// does not enter (inseparable ones) are not in it.
std::vector<std::vector<search::Scored>> every_scored(const search::Space& space, const base::GramSet& grams);

/// The summary of every_scored(); `penalty` as in search::WalkOptions::summary_penalty. Leaves out no weight, however
/// small; sums in long double.
search::Summary plain_summary(const search::Space& space, const base::GramSet& grams,
                              const std::vector<double>& penalty);

}  // namespace formsieve::test

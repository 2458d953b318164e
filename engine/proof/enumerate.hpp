// Small nodes candidate by candidate.
#pragma once

#include "proof/counts.hpp"
#include "proof/problem.hpp"
#include "proof/reduced.hpp"

#include <cstdint>
#include <vector>

namespace formsieve::proof {

struct Found {
  search::Choice choice;
  CandidateScore score;
};

/// Candidates of a node, ranges of columns and terms apart; at most `most` + 1.
std::uint64_t count_candidates(const Reduced& problem, std::uint64_t most);

/// Appends all candidates within the ranges that score at most `threshold`. Scores come from eliminating one form after
/// another; those that rounding leaves in doubt are scored anew, and all that are appended have the canonical score.
/// Returns how many candidates were met.
std::uint64_t enumerate(const RootGram& root, const Reduced& problem, const CountRange& range, double threshold,
                        std::vector<Found>& found);

}  // namespace formsieve::proof

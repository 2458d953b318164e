// Where descents start: random candidates, and candidates near a good one.
#pragma once

#include "base/random.hpp"
#include "search/guided_space.hpp"

#include <cstddef>
#include <cstdint>

namespace formsieve::search {

/// The generator of restart `index`: depends on both numbers alone.
base::SplitMix64 generator_of(std::uint64_t seed, std::uint64_t index);

/// A random number of random predictors, at most `most_terms` (or those that are always in), in random forms.
Choices random_start(const GuidedSpace& space, std::size_t most_terms, base::SplitMix64& random);

/// A candidate after a few random changes: predictors leave, enter or take another form, at least two and at most a
/// third more than that of its terms.
Choices shaken(const GuidedSpace& space, const Choices& candidate, base::SplitMix64& random);

}  // namespace formsieve::search

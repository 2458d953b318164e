// Own-units matrices of the small problems by plain loops over rows.
#pragma once

#include "problem.hpp"

#include <cstddef>
#include <cstdint>

namespace formsieve::test {

/// Adds to the Gram matrices of a problem without weights the own-units matrices of one response, about slopes and
/// working responses that are invented: slopes spread by e^±spread, working responses near the response.
void add_own_units(const Problem& problem, std::uint64_t seed, std::size_t response, double spread,
                   base::GramSet& grams);

}  // namespace formsieve::test

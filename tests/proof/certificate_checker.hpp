// Checks a proof from its certificate, the Gram matrix and the list, by code of its own in long double.
#pragma once

#include "proof/certificate.hpp"
#include "proof/problem.hpp"
#include "proof/prove.hpp"

#include <string>

namespace formsieve::test {

/// Empty when the certificate shows that no candidate of the restriction scores below `threshold` (of the list: its
/// last score when full, the best + within otherwise) without being listed, and that the list is what it says; else
/// what is wrong first. `tolerance` is what rounding may do to a score.
std::string fault_of(const proof::Problem& problem, const proof::Restriction& restriction,
                     const proof::Certificate& certificate, const proof::Proof& result, std::size_t keep, double within,
                     double tolerance);

}  // namespace formsieve::test

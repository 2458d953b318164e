// Adjustment of the p-values of one candidate together.
#pragma once

#include <span>
#include <vector>

namespace formsieve::checks {

/// Holm 1979: with p sorted rising, adjusted p_(i) = max over j ≤ i of min(1, (m − j + 1)·p_(j)); returned in the order
/// given.
std::vector<double> holm(std::span<const double> p);

}  // namespace formsieve::checks

// Natural logarithms of many numbers at a time.
#pragma once

#include <cstddef>

namespace formsieve::design {

/// values[i] ← ln values[i] for i < n, within four units in the last place; NaN where it is not positive.
void take_logarithms(double* values, std::size_t n);

}  // namespace formsieve::design

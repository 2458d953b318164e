// Invented searches in which some predictors matter much and the others not at all.
#pragma once

#include "simulated.hpp"

#include <cstddef>
#include <cstdint>

namespace formsieve::bench {

struct StrongShape {
  std::size_t n_predictors = 14, n_forms = 6, n_strong = 5, n_rows = 400;
  double noise = 0.3;  ///< in units of the signal's standard deviation
  std::uint64_t seed = 1;
};

/// One response, as it is measured; skewed predictors; each strong one acts through one of its forms. At most 6 forms.
Problem simulate_strong(const StrongShape& shape);

}  // namespace formsieve::bench

// Cook's distance.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

namespace formsieve::checks {

/// A row of at least this leverage fits itself: some combination of coefficients rests on it alone, and its Cook
/// distance is 0/0. Rounding leaves such leverages within 1e-12 of 1; the largest honest one in the tests is 0.9928.
inline constexpr double kFullLeverage = 1.0 - 1e-10;

/// Cook 1977: D_i = w_i e_i² h_i / (p·s²·(1 − h_i)²), leverage h of the whitened problem, s² = Σ w e²/(n − p). Rows of
/// full leverage get 0. Requires s > 0.
Eigen::VectorXd cook_distances(const Subject& subject);

}  // namespace formsieve::checks

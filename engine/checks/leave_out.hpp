// The move of predictions and coefficients when one row is left out.
#pragma once

#include "checks/deletion.hpp"
#include "checks/workings.hpp"

#include <Eigen/Core>

namespace formsieve::checks {

/// Largest change, over all rows j, of the fitted value of row j when `row` is left out, in the standard deviation
/// σ/√w_j of a measurement at row j: |q_j·q_row|·√w|e|/((1 − h)·σ) with q the rows of an orthonormal basis of the
/// whitened design. DFFITS (Belsley, Kuh & Welsch 1980) is the same at j = row, but for its own scale. 0 at full
/// leverage. Cost O(n k).
double largest_prediction_change(const Workings& workings, Eigen::Index row);

/// T [p × p] with coefficients = T·Q'(√w y), hence (X'WX)⁻¹ = T T': the inverse root in the order and units of the
/// design, its columns those of workings.of_the_fit().q. Requires a full rank. Cost O(p³).
Eigen::MatrixXd inverse_root(const Workings& workings);

/// [p] b(i) − b, each in the standard error of its coefficient (DFBETAS of Belsley, Kuh & Welsch 1980 with the sign of
/// leaving out, and σ of all rows). 0 at full leverage. Cost O(p²).
Eigen::VectorXd coefficient_moves_se(const Workings& workings, const Eigen::MatrixXd& inverse_root, Eigen::Index row);

}  // namespace formsieve::checks

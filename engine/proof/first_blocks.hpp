// The first D of a proof.
#pragma once

#include "proof/reduced.hpp"

#include <Eigen/Core>

namespace formsieve::proof {

/// Some D with M − D proved positive definite, far enough from singular for sweeps to start from; false when none was
/// found, as where more predictors than rows may be in. Cost: some Cholesky factorisations.
bool first_blocks(const Reduced& problem, Eigen::MatrixXd& d);

/// Shrinks the blocks of D and their off-diagonals until the smallest pivot of M − D is no longer tiny: sweeps update
/// an inverse, which a condition of 1e11 would spoil. False: D is unchanged.
bool recondition(const Reduced& problem, Eigen::MatrixXd& d);

}  // namespace formsieve::proof

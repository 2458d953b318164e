// The relaxation that proves nodes.
//
// Take any block-diagonal D, one block for each open predictor, with Z = M − D ⪰ 0, and any vector v; g = b − Zv. For
// the coefficients c of a candidate, cᵀZc ≥ 2vᵀZc − vᵀZv, and a candidate uses one form of a predictor, so that
//     RSS_rel ≥ yy − vᵀZv − Σ_j h_j,   h_jf = g_fᵀ D_ff⁻¹ g_f for the form f used of predictor j, 0 for none.
// The perspective relaxation of Pilanci, Wainwright and El Ghaoui (2015) and Dong, Chen and Linderoth (2015), with one
// block for the forms of a predictor.
#pragma once

#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <cstddef>

namespace formsieve::proof {

/// A point of the dual. D is kept as a full matrix, zero outside the predictors' blocks.
struct DualPoint {
  Eigen::MatrixXd d;
  Eigen::VectorXd g;  ///< b − Zv
  Eigen::VectorXd v;
  double lambda = 0.0;  ///< price of a column in units of RSS_rel
  double mu = 0.0;      ///< weight of the barrier
};

/// Columns that a candidate of the node may have, all counted, and what RSS_rel must be reached at the two ends:
/// τ_k = exp((threshold − penalty_k − …) / n).
struct ColumnRange {
  std::size_t fewest = 0, most = 0;
  double tau_fewest = 0.0, tau_most = 0.0;
};

}  // namespace formsieve::proof

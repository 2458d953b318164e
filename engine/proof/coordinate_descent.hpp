// A good v for a given D: coordinate descent on the relaxation.
#pragma once

#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <cstddef>

namespace formsieve::proof {

/// Lowers vᵀZv − 2bᵀv + Σ_j ψ_j(v) form by form from the given v (form_scales.hpp; λ the price of a column): in closed
/// form where a form has one column, by a step of proximal gradient otherwise. Ends where a sweep changes little. Cost
/// of a sweep: O(columns) for each coefficient that changes. Returns the sweeps made.
std::size_t coordinate_descent(const Reduced& problem, const Eigen::MatrixXd& z, const Eigen::MatrixXd& d,
                               double lambda, std::size_t most_sweeps, Eigen::VectorXd& v);

}  // namespace formsieve::proof

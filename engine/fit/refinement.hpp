// Private to room fit: iterative refinement of a least-squares solution.
#pragma once

#include "fit/centred_factor.hpp"

namespace formsieve::fit {

/// A least-squares solution held in long double, since the terms of a near-dependent design cancel each other.
struct RefinedSolution {
  Vector<long double> coefficients;    ///< [p] in the order and units of the design
  Vector<long double> residuals_form;  ///< [n] raw: response − fitted
};

/// Solves the fit with `factor` and refines it: the augmented system s + Aγ = √w·y, Aᵀs = 0 is solved again and again
/// for its own residuals, taken in long double from the design as given (Björck 1967), while the corrections shrink.
/// With an error of the factor's solve of κε below one, each pass gains as many digits as the first had. Cost O(n p) a
/// pass, at most kMostPasses.
template <class Scalar>
RefinedSolution refined_solution(const CentredFactor<Scalar>& factor, const Eigen::Ref<const Eigen::MatrixXd>& x,
                                 const Eigen::Ref<const Eigen::VectorXd>& y,
                                 const Eigen::Ref<const Eigen::VectorXd>& weights);

/// Passes beyond which nothing was ever gained: near the rank threshold a pass still gains two digits of nineteen.
inline constexpr int kMostPasses = 10;

extern template RefinedSolution refined_solution(const CentredFactor<double>&, const Eigen::Ref<const Eigen::MatrixXd>&,
                                                 const Eigen::Ref<const Eigen::VectorXd>&,
                                                 const Eigen::Ref<const Eigen::VectorXd>&);
extern template RefinedSolution refined_solution(const CentredFactor<long double>&,
                                                 const Eigen::Ref<const Eigen::MatrixXd>&,
                                                 const Eigen::Ref<const Eigen::VectorXd>&,
                                                 const Eigen::Ref<const Eigen::VectorXd>&);

}  // namespace formsieve::fit

// Room fit: QR least squares, covariance, leverage. Knows nothing of the search. May call: base.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/fit.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <vector>

namespace formsieve::fit {

/// One weighted least-squares fit, all quantities on the response form's scale. p = columns of the design with
/// intercept.
struct Fit {
  Eigen::VectorXd coefficients;  ///< [p]
  Eigen::VectorXd se;            ///< [p] classical; NaN when no degrees of freedom are left
  Eigen::VectorXd se_robust;     ///< [p] HC3 of the √w-whitened problem (MacKinnon & White 1985)
  Eigen::VectorXd fitted;        ///< [n]
  Eigen::VectorXd residuals;     ///< [n] raw: response − fitted
  Eigen::VectorXd leverage;      ///< [n] of the whitened problem
  Eigen::MatrixXd covariance;    ///< [p × p] classical
  double rss = 0.0;              ///< weighted
  double tss = 0.0;              ///< weighted, about the weighted mean
  double sigma = 0.0;            ///< √(rss/(n − p)); NaN when n = p
  std::size_t rank = 0;
};

/// A row whose leverage comes within this of 1 determines its own fitted value: without it the design has lower rank,
/// and its deleted residual, 0/0, cannot be computed (1 − h carries a rounding of about 1e-15, so that five digits are
/// left here). HC3 of every coefficient that such a row bears on is NaN; the others keep theirs.
inline constexpr double kOwnFit = 1e-10;
/// Share of a coefficient's whole influence (the norm over rows) at which a row is held to bear on it: well above the
/// rounding of the influence, 1e-16 by condition number.
inline constexpr double kNoInfluence = 1e-9;

/// Full fit by Householder QR with column pivoting on centred, scaled, √w-whitened columns; rank decided at
/// n·ε·max|R_ii|; the solution refined with residuals in long double while that improves it (Björck 1967). Where the
/// smallest pivot is below 1e-4 of the largest, the QR itself is done in long double, so that standard errors and
/// leverages keep their digits too. Column 0 of `x` must be the intercept. Errors (kind data): fewer rows than columns,
/// rank deficiency (naming the column index), a value that is not finite, a weight that is not positive. n = p is
/// allowed: residuals and rss are 0, sigma, se and se_robust NaN. A fit whose residuals are the rounding of the
/// response (root mean square within 4 ε of the response's) is exact: residuals, rss, sigma and standard errors are 0,
/// fitted is the response. Cost O(n p²).
Result<Fit> least_squares(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                          const Eigen::Ref<const Eigen::VectorXd>& weights);  // weights: size 0 for none

/// Coefficients and residuals only, for cross-validation folds: the same QR without refinement, covariance and
/// leverage. Same errors. About 16 digits less the condition number of the centred columns.
struct QuickFit {
  Eigen::VectorXd coefficients;
  Eigen::VectorXd residuals;
};
Result<QuickFit> quick_fit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                           const Eigen::Ref<const Eigen::VectorXd>& weights);

/// Own-scale likelihood and criteria (design.md). `log_jacobian` = Σ ln|g′(y_i)|, `half_log_weights` = ½ Σ ln w_i.
/// An exact fit (rss 0) has log-likelihood +∞ and AIC, BIC −∞ (AICc too, unless n ≤ q + 1). A Jacobian that is not
/// finite (√y at y = 0) leaves no density to compare: log-likelihood −∞, criteria +∞, so that such a candidate ranks
/// last by them.
Likelihood own_scale_likelihood(double rss, std::size_t n, std::size_t n_coefficients, double log_jacobian,
                                double half_log_weights);

/// Criterion penalties without the likelihood: AIC 2q, AICc 2q + 2q(q+1)/(n−q−1), BIC q·ln n, with q = n_coefficients
/// + 1.
double aic_penalty(std::size_t n_coefficients);
double aicc_penalty(std::size_t n_coefficients, std::size_t n);
double bic_penalty(std::size_t n_coefficients, std::size_t n);

}  // namespace formsieve::fit

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

/// Full fit by Householder QR with column pivoting on centred, scaled, √w-whitened columns; rank decided at
/// n·ε·max|R_ii|; coefficients refined once with residuals accumulated in long double (Björck 1967). Column 0 of `x`
/// must be the intercept. Errors (kind data): fewer rows than columns, rank deficiency (naming the column index), a
/// value that is not finite. Cost O(n p²).
Result<Fit> least_squares(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                          const Eigen::Ref<const Eigen::VectorXd>& weights);  // weights: size 0 for none

/// Coefficients and residuals only, for cross-validation folds: the same QR without refinement, covariance and
/// leverage.
struct QuickFit {
  Eigen::VectorXd coefficients;
  Eigen::VectorXd residuals;
};
Result<QuickFit> quick_fit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                           const Eigen::Ref<const Eigen::VectorXd>& weights);

/// Own-scale likelihood and criteria (design.md). `log_jacobian` = Σ ln|g′(y_i)|, `half_log_weights` = ½ Σ ln w_i.
Likelihood own_scale_likelihood(double rss, std::size_t n, std::size_t n_coefficients, double log_jacobian,
                                double half_log_weights);

/// Criterion penalties without the likelihood: AIC 2q, AICc 2q + 2q(q+1)/(n−q−1), BIC q·ln n, with q = n_coefficients
/// + 1.
double aic_penalty(std::size_t n_coefficients);
double aicc_penalty(std::size_t n_coefficients, std::size_t n);
double bic_penalty(std::size_t n_coefficients, std::size_t n);

}  // namespace formsieve::fit

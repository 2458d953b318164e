// The Durbin–Watson statistic and its distribution under independent normal errors.
//
// With e = M z (M the projection off the design, z standard normal) and A the matrix of squared neighbouring
// differences, P(d < d₀) = P(z'Cz < 0), C = M S M, S = A − d₀I tridiagonal. The characteristic function of z'Cz is
// det(I − 2iuC)^{-1/2} = (det T · det Q'T⁻¹Q)^{-1/2}, T = I − 2iuS, Q an orthonormal basis of the design: O(n p²) for
// one u instead of the O(n³) of the eigenvalues of C. One integral over u (Gil-Pelaez 1951; Imhof 1961) gives the
// probability; evaluating it through the band structure is the idea of Ansley, Kohn & Shively 1992. A weighted fit is
// the same with whitened residuals and design.
#pragma once

#include <Eigen/Core>

namespace formsieve::checks {

/// d = Σ (e_t − e_{t−1})² / Σ e_t² of residuals in their order (Durbin & Watson 1950); about 2(1 − r) with r the
/// correlation of neighbours. Requires Σ e² > 0.
double durbin_watson(const Eigen::Ref<const Eigen::VectorXd>& residuals);

/// Σ (e_t − ē)(e_{t−1} − ē) / Σ (e_t − ē)²; 0 without spread.
double lag_one_autocorrelation(const Eigen::Ref<const Eigen::VectorXd>& residuals);

/// Distribution of d for one design in one order of the rows.
class DurbinWatsonDistribution {
 public:
  /// `basis` [n × p]: orthonormal basis of the (whitened) design with its constant, rows in order. Needs n − p ≥ 2:
  /// with one degree of freedom d can take one value only.
  explicit DurbinWatsonDistribution(Eigen::MatrixXd basis);

  /// P(D < d), absolute error below 1e-8 by comparison with published bounds and other programs. Cost O(n p²) times
  /// about 15 for large n, 200 for small.
  double lower_tail(double d) const;

  /// P(D < d) from mean and variance of z'Cz taken as normal: one pass, O(n p²).
  double lower_tail_by_moments(double d) const;

 private:
  struct Spread;
  Spread spread_at(double d) const;

  Eigen::MatrixXd basis_;
};

}  // namespace formsieve::checks

// The Durbin–Watson statistic and its distribution under independent normal errors.
//
// With e = W^{-1/2} M z (M the projection that removes the whitened design, z standard normal) and A the matrix of
// squared neighbouring differences, P(d < d₀) = P(z'Cz < 0), C = M S M, S = W^{-1/2}(A − d₀I)W^{-1/2} tridiagonal.
// The characteristic function of z'Cz is det(I − 2iuC)^{-1/2} = (det T · det Q'T⁻¹Q)^{-1/2}, T = I − 2iuS, Q an
// orthonormal basis of the whitened design: O(n p²) for one u instead of the O(n³) of the eigenvalues of C. One
// integral over u (Gil-Pelaez 1951; Imhof 1961) gives the probability; evaluating it through the band structure is the
// idea of Ansley, Kohn & Shively 1992.
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
  /// `basis` [n × p]: orthonormal basis of the whitened design with its constant, rows in order. `weights`: precisions
  /// in the same order, or size 0. Needs n − p ≥ 2: with one degree of freedom d can take one value only.
  DurbinWatsonDistribution(Eigen::MatrixXd basis, const Eigen::Ref<const Eigen::VectorXd>& weights);

  /// P(D < d), absolute error below 1e-8 by comparison with published bounds and other programs. Cost O(n p²) times
  /// about 100.
  double lower_tail(double d) const;

  /// P(D < d) from mean and variance of z'Cz taken as normal: one pass, O(n p²).
  double lower_tail_by_moments(double d) const;

 private:
  struct Form;  // S for one d
  Form form_at(double d) const;

  Eigen::MatrixXd basis_;
  Eigen::VectorXd inverse_sqrt_weights_;  ///< scaled to a mean square of 1
};

}  // namespace formsieve::checks

// Positive semidefiniteness that is proved, not only met.
#pragma once

#include "proof/dense_kernel.hpp"
#include "proof/reduced.hpp"

#include <Eigen/Core>

namespace formsieve::proof {

/// Z = M − D with a proof that it is positive definite whatever rounding did.
///
/// Rump (2006), Verification of positive definiteness, BIT 46, 433–452: if the Cholesky factorisation of A − cI in
/// floating point, in any order of its sums and with fused operations or not, runs to completion and c ≥ γ_{q+1}/(1 −
/// γ_{q+1}) · trace(A), then the symmetric A of order q is positive definite. Here A is the computed Z; the true one
/// differs from it in every entry by at most Reduced::entry_error and one rounding of the subtraction, hence in norm by
/// at most q times that, which c covers too.
class CertifiedDifference {
 public:
  /// False: no proof. D is symmetric, zero outside the predictors' blocks. Cost: a Cholesky factorisation.
  bool certify(const Reduced& problem, const Eigen::MatrixXd& d);

  const Eigen::MatrixXd& z() const { return z_; }
  /// The inverse of Z − cI, c about 1e-12: that of Z as far as a search for better points needs it.
  Eigen::VectorXd solve(const Eigen::VectorXd& right) const;
  Eigen::MatrixXd inverse() const;
  /// Bound on the error of an entry of z().
  double entry_error() const { return entry_error_; }
  /// Smallest over largest pivot.
  double pivot_ratio() const;

 private:
  Eigen::MatrixXd z_;
  PaddedMatrix factor_;
  double entry_error_ = 0.0;
};

}  // namespace formsieve::proof

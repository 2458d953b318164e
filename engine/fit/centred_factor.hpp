// Private to room fit: the factorisation that both fits share.
#pragma once

#include <Eigen/Core>
#include <Eigen/QR>

#include <cmath>

namespace formsieve::fit {

template <class Scalar>
using Vector = Eigen::Matrix<Scalar, Eigen::Dynamic, 1>;
template <class Scalar>
using Matrix = Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic>;

/// Column-pivoted Householder QR of the whitened, centred and scaled design,
///
///     √w_i·(x_ij − c_j)/s_j = (Q R Pᵀ)_ij,    c_j the weighted mean of column j, s_j the norm that makes it 1,
///
/// with the intercept's own direction q₀ = √w/‖√w‖ kept apart: the centred columns are orthogonal to it. Together A =
/// [√w | Q R Pᵀ] spans the columns of the design, and its coefficients are (γ₀, γ₁, …): γ₀ the fitted value at the
/// centre, γ_j in units of s_j.
/// `Scalar` is double, or long double where the columns are nearly dependent.
template <class Scalar>
class CentredFactor {
 public:
  /// `x` [n × p] with the intercept first, n ≥ p, all finite; `weights` [n] positive, or size 0. Cost O(n p²).
  CentredFactor(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& weights);

  Eigen::Index n_rows() const { return unit_intercept_.size(); }
  Eigen::Index n_coefficients() const { return centre_.size() + 1; }

  /// A column of the design without variation on these rows; 0 when there is none.
  Eigen::Index constant_column() const { return constant_column_; }
  /// The first column in pivot order whose pivot does not exceed n·ε·max|R_ii|, ε that of double; 0 when there is none.
  Eigen::Index dependent_column() const;
  /// min|R_ii|/max|R_ii|; 1 for an intercept alone.
  Scalar smallest_pivot_rel() const;

  const Vector<long double>& centre() const { return centre_; }  ///< [p − 1] c_j
  const Vector<long double>& scale() const { return scale_; }    ///< [p − 1] s_j

  /// The augmented system of Björck 1967: s + A γ = f, Aᵀ s = g.
  void solve_augmented(const Vector<Scalar>& f, const Vector<Scalar>& g, Vector<Scalar>& s,
                       Vector<Scalar>& gamma) const;

  /// [n × p] orthonormal basis of the columns of A: q₀ first, then Q in pivot order.
  Matrix<Scalar> thin_q() const;
  /// [p × p] T with (XᵀWX)⁻¹ = T Tᵀ in the order and units of the design; its columns belong to those of thin_q().
  Matrix<Scalar> inverse_root() const;

 private:
  void prepare_weights(const Eigen::Ref<const Eigen::VectorXd>& weights, Eigen::Index n);
  /// Writes column j + 1 of the design into `column`, centred, scaled and whitened. False when it does not vary.
  bool prepare_column(const Eigen::Ref<const Eigen::VectorXd>& x, Eigen::Index j, Eigen::Ref<Vector<Scalar>> column);
  Scalar weighted_mean(const Eigen::Ref<const Vector<Scalar>>& values) const;
  Eigen::Index n_pivots() const { return centre_.size(); }
  Scalar pivot(Eigen::Index i) const { return std::abs(qr_.matrixQR()(i, i)); }
  auto triangle() const {
    return qr_.matrixQR().topLeftCorner(n_pivots(), n_pivots()).template triangularView<Eigen::Upper>();
  }

  Vector<Scalar> weights_, root_weights_;  ///< [n], or size 0
  Vector<Scalar> unit_intercept_;          ///< [n] q₀
  Scalar intercept_norm_ = 1;              ///< ‖√w‖
  Vector<long double> centre_, scale_;
  Eigen::Index constant_column_ = 0;
  Eigen::ColPivHouseholderQR<Matrix<Scalar>> qr_;  ///< unset when the intercept is alone
};

extern template class CentredFactor<double>;
extern template class CentredFactor<long double>;

}  // namespace formsieve::fit

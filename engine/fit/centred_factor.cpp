#include "fit/centred_factor.hpp"

#include "fit/input_check.hpp"

#include <limits>

namespace formsieve::fit {

template <class Scalar>
CentredFactor<Scalar>::CentredFactor(const Eigen::Ref<const Eigen::MatrixXd>& x,
                                     const Eigen::Ref<const Eigen::VectorXd>& weights) {
  const Eigen::Index k = x.cols() - 1;
  prepare_weights(weights, x.rows());
  centre_.resize(k);
  scale_.resize(k);
  if (k == 0) return;
  Matrix<Scalar> columns(x.rows(), k);
  for (Eigen::Index j = 0; j < k; ++j) {
    if (!prepare_column(x.col(j + 1), j, columns.col(j)) && constant_column_ == 0) constant_column_ = j + 1;
  }
  qr_.compute(columns);
}

template <class Scalar>
void CentredFactor<Scalar>::prepare_weights(const Eigen::Ref<const Eigen::VectorXd>& weights, Eigen::Index n) {
  weights_ = weights.template cast<Scalar>();
  root_weights_ = weights_.cwiseSqrt();
  if (weights.size() == 0) {
    intercept_norm_ = std::sqrt(static_cast<Scalar>(n));
    unit_intercept_.setConstant(n, Scalar(1) / intercept_norm_);
  } else {
    intercept_norm_ = std::sqrt(weights_.sum());
    unit_intercept_ = root_weights_ / intercept_norm_;
  }
}

template <class Scalar>
Scalar CentredFactor<Scalar>::weighted_mean(const Eigen::Ref<const Vector<Scalar>>& values) const {
  if (weights_.size() == 0) return values.sum() / static_cast<Scalar>(values.size());
  return weights_.dot(values) / (intercept_norm_ * intercept_norm_);
}

template <class Scalar>
bool CentredFactor<Scalar>::prepare_column(const Eigen::Ref<const Eigen::VectorXd>& x, Eigen::Index j,
                                           Eigen::Ref<Vector<Scalar>> column) {
  column = x.template cast<Scalar>();
  const Scalar largest = column.cwiseAbs().maxCoeff();
  const Scalar mean = weighted_mean(column);
  column.array() -= mean;
  // The first mean carries a rounding that is large beside the spread of a column such as 10¹² ± 1; the second pass
  // takes it out, so that the column is orthogonal to the intercept whatever its offset.
  const Scalar rest = weighted_mean(column);
  column.array() -= rest;
  centre_(j) = static_cast<long double>(mean) + static_cast<long double>(rest);
  scale_(j) = 1.0L;
  int exponent = 0;
  std::frexp(column.cwiseAbs().maxCoeff(),
             &exponent);  // a power of two first: the norm can neither overflow nor vanish
  column *= std::ldexp(Scalar(1), -exponent);
  if (root_weights_.size() != 0) column.array() *= root_weights_.array();
  const Scalar norm = column.norm();
  const auto deviation_rms = static_cast<double>(std::ldexp(norm / intercept_norm_, exponent));
  if (!does_vary(deviation_rms, static_cast<double>(largest))) {
    column.setZero();
    return false;
  }
  column /= norm;
  scale_(j) = std::ldexp(static_cast<long double>(norm), exponent);
  return true;
}

template <class Scalar>
Eigen::Index CentredFactor<Scalar>::dependent_column() const {
  if (n_pivots() == 0) return 0;
  const Scalar threshold = static_cast<Scalar>(n_rows()) * static_cast<Scalar>(std::numeric_limits<double>::epsilon()) *
                           pivot(0);  // the pivots fall: the first is the largest
  for (Eigen::Index i = 0; i < n_pivots(); ++i) {
    if (!(pivot(i) > threshold)) return qr_.colsPermutation().indices()(i) + 1;
  }
  return 0;
}

template <class Scalar>
Scalar CentredFactor<Scalar>::smallest_pivot_rel() const {
  return n_pivots() == 0 ? Scalar(1) : pivot(n_pivots() - 1) / pivot(0);
}

template <class Scalar>
void CentredFactor<Scalar>::solve_augmented(const Vector<Scalar>& f, const Vector<Scalar>& g, Vector<Scalar>& s,
                                            Vector<Scalar>& gamma) const {
  const Eigen::Index k = n_pivots();
  const Scalar along = unit_intercept_.dot(f);
  const Scalar wanted = g(0) / intercept_norm_;
  gamma.resize(k + 1);
  gamma(0) = (along - wanted) / intercept_norm_;
  s = f - unit_intercept_ * along;
  if (k > 0) {
    const Vector<Scalar> g_pivoted = qr_.colsPermutation().transpose() * g.tail(k);
    const Vector<Scalar> h = triangle().adjoint().solve(g_pivoted);
    s.applyOnTheLeft(qr_.householderQ().setLength(k).adjoint());
    const Vector<Scalar> pivoted = triangle().solve(s.head(k) - h);
    gamma.tail(k) = qr_.colsPermutation() * pivoted;
    s.head(k) = h;
    s.applyOnTheLeft(qr_.householderQ().setLength(k));
  }
  s += unit_intercept_ * wanted;
}

template <class Scalar>
Matrix<Scalar> CentredFactor<Scalar>::thin_q() const {
  Matrix<Scalar> q = Matrix<Scalar>::Zero(n_rows(), n_coefficients());
  q.col(0) = unit_intercept_;
  Vector<Scalar> column(n_rows());
  // One column at a time: the library's blocked product would choose its blocks from the cache it finds.
  for (Eigen::Index j = 0; j < n_pivots(); ++j) {
    column.setZero();
    column(j) = 1;
    column.applyOnTheLeft(qr_.householderQ().setLength(n_pivots()));
    q.col(j + 1) = column;
  }
  return q;
}

template <class Scalar>
Matrix<Scalar> CentredFactor<Scalar>::inverse_root() const {
  const Eigen::Index k = n_pivots();
  Matrix<Scalar> root = Matrix<Scalar>::Zero(k + 1, k + 1);
  root(0, 0) = Scalar(1) / intercept_norm_;
  if (k == 0) return root;
  const Matrix<Scalar> inverse_triangle = triangle().solve(Matrix<Scalar>::Identity(k, k));
  root.bottomRightCorner(k, k) = qr_.colsPermutation() * inverse_triangle;
  for (Eigen::Index j = 0; j < k; ++j) {
    root.row(j + 1) /= static_cast<Scalar>(scale_(j));
    root.row(0).tail(k) -= static_cast<Scalar>(centre_(j)) * root.row(j + 1).tail(k);
  }
  return root;
}

template class CentredFactor<double>;
template class CentredFactor<long double>;

}  // namespace formsieve::fit

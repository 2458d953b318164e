// The fast fit: the whitened rows of [1 | x − c | y − c_y] are folded into one triangle block by block, and the small
// triangle of the predictors alone is then factorised with pivoting. Pivoting the triangle is pivoting the design,
// since both have the same inner products, and every row is read from memory once.
#include "fit/least_squares.hpp"

#include "fit/input_check.hpp"
#include "fit/row_block_kernel.hpp"

#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

namespace formsieve::fit {

namespace {

using ConstMatrix = Eigen::Ref<const Eigen::MatrixXd>;
using ConstVector = Eigen::Ref<const Eigen::VectorXd>;
using Eigen::Index;

/// A column as (x − centre)·2^−exponent: about its mean, and of a size whose square is a double.
struct Standard {
  double centre = 0.0;
  int exponent = 0;
};

Standard standard(const ConstVector& column) {
  Standard by;
  std::frexp(column.cwiseAbs().maxCoeff(), &by.exponent);
  by.centre = std::ldexp((column * std::ldexp(1.0, -by.exponent)).mean(), by.exponent);
  return by;
}

/// The columns of one fit, response last, with the standard that each is taken to.
class Columns {
 public:
  Columns(const ConstMatrix& x, const ConstVector& y, const ConstVector& weights) : x_(x), y_(y), weights_(weights) {
    standards_.resize(static_cast<std::size_t>(x.cols()) + 1);
    for (Index j = 1; j <= x.cols(); ++j) standards_[static_cast<std::size_t>(j)] = fit::standard(column(j));
  }

  Index n_rows() const { return x_.rows(); }
  Index n_coefficients() const { return x_.cols(); }
  ConstVector column(Index j) const { return j < x_.cols() ? ConstVector(x_.col(j)) : y_; }
  const Standard& standard(Index j) const { return standards_[static_cast<std::size_t>(j)]; }
  const Standard& response_standard() const { return standards_.back(); }

  /// Rows start … start + rows of the whitened columns.
  void write_block(Index start, Index rows, Eigen::MatrixXd& block) const {
    block.col(0).head(rows).setOnes();
    for (Index j = 1; j <= n_coefficients(); ++j) {
      const Standard& by = standard(j);
      block.col(j).head(rows) = (column(j).segment(start, rows).array() - by.centre) * std::ldexp(1.0, -by.exponent);
    }
    if (weights_.size() != 0) block.topRows(rows).array().colwise() *= weights_.segment(start, rows).array().sqrt();
  }

 private:
  const ConstMatrix& x_;
  const ConstVector& y_;
  const ConstVector& weights_;
  std::vector<Standard> standards_;
};

/// R of all whitened rows, (p + 1) × (p + 1).
Eigen::MatrixXd folded_triangle(const Columns& columns) {
  const Index m = columns.n_coefficients() + 1;
  Eigen::MatrixXd triangle = Eigen::MatrixXd::Zero(m, m);
  Eigen::MatrixXd block(static_cast<Index>(kRowBlockStride), m);
  for (Index start = 0; start < columns.n_rows(); start += static_cast<Index>(kRowBlock)) {
    const Index rows = std::min(static_cast<Index>(kRowBlock), columns.n_rows() - start);
    columns.write_block(start, rows, block);
    fold_in_rows(triangle.data(), block.data(), static_cast<std::size_t>(rows), static_cast<std::size_t>(m));
  }
  return triangle;
}

/// γ of the standardised columns, intercept first, from the triangle; the column at fault otherwise.
Result<Eigen::VectorXd> pivoted_solution(const Eigen::MatrixXd& triangle, Index n_rows) {
  const Index k = triangle.rows() - 2;
  Eigen::VectorXd gamma(k + 1);
  gamma(0) = triangle(0, k + 1) / triangle(0, 0);
  if (k == 0) return gamma;
  Eigen::MatrixXd inner = triangle.block(1, 1, k, k).triangularView<Eigen::Upper>();
  Eigen::VectorXd norms(k);
  for (Index j = 0; j < k; ++j) {
    norms(j) = inner.col(j).norm();
    if (!does_vary(norms(j) / std::abs(triangle(0, 0)), 1.0)) return dependent_column_error(j + 1, true);
    inner.col(j) /= norms(j);
  }
  const Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(inner);
  const auto pivots = qr.matrixQR().diagonal().cwiseAbs();
  const double threshold = static_cast<double>(n_rows) * std::numeric_limits<double>::epsilon() * pivots(0);
  for (Index i = 0; i < k; ++i) {
    if (!(pivots(i) > threshold)) return dependent_column_error(qr.colsPermutation().indices()(i) + 1, false);
  }
  Eigen::VectorXd right = triangle.col(k + 1).segment(1, k);
  right.applyOnTheLeft(qr.householderQ().adjoint());
  qr.matrixQR().triangularView<Eigen::Upper>().solveInPlace(right);
  gamma.tail(k) = (qr.colsPermutation() * right).cwiseQuotient(norms);
  gamma(0) -= triangle.row(0).segment(1, k).dot(gamma.tail(k)) / triangle(0, 0);
  return gamma;
}

}  // namespace

Result<QuickFit> quick_fit(const ConstMatrix& x, const ConstVector& y, const ConstVector& weights) {
  if (const Status input = check_input(x, y, weights); !input.ok()) return input.error();
  const Columns columns(x, y, weights);
  auto gamma = pivoted_solution(folded_triangle(columns), x.rows());
  if (!gamma.ok()) return std::move(gamma).error();
  const auto& [y_centre, y_exponent] = columns.response_standard();
  const double at_centre = std::ldexp((*gamma)(0), y_exponent);
  QuickFit fit{std::move(*gamma), (y.array() - y_centre) - at_centre};
  long double intercept = static_cast<long double>(y_centre) + at_centre;
  for (Index j = 1; j < x.cols(); ++j) {
    const auto& [centre, exponent] = columns.standard(j);
    const double slope = std::ldexp(fit.coefficients(j), y_exponent - exponent);
    fit.residuals.array() -= slope * (x.col(j).array() - centre);
    intercept -= static_cast<long double>(slope) * centre;
    fit.coefficients(j) = slope;
  }
  fit.coefficients(0) = static_cast<double>(intercept);
  return fit;
}

}  // namespace formsieve::fit

#include "fit/standard_columns.hpp"

#include "fit/input_check.hpp"
#include "fit/row_block_kernel.hpp"

#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::fit {

namespace {

using Eigen::Index;
using ConstVector = Eigen::Ref<const Eigen::VectorXd>;

constexpr double kEpsilon = std::numeric_limits<double>::epsilon();

Standard standard_of(const ConstVector& column) {
  Standard by;
  std::frexp(column.cwiseAbs().maxCoeff(), &by.exponent);
  by.centre = std::ldexp((column * std::ldexp(1.0, -by.exponent)).mean(), by.exponent);
  return by;
}

/// Folds n_rows rows, handed over block by block by `write`(start, count, block), into a triangle of m columns.
template <class WriteBlock>
Eigen::MatrixXd fold(Index n_rows, Index m, WriteBlock write) {
  Eigen::MatrixXd triangle = Eigen::MatrixXd::Zero(m, m);
  Eigen::MatrixXd block(static_cast<Index>(kRowBlockStride), m);
  for (Index start = 0; start < n_rows; start += static_cast<Index>(kRowBlock)) {
    const Index count = std::min(static_cast<Index>(kRowBlock), n_rows - start);
    write(start, count, block);
    fold_in_rows(triangle.data(), block.data(), static_cast<std::size_t>(count), static_cast<std::size_t>(m));
  }
  return triangle;
}

/// Norms of the centred columns, which are brought to 1. The column at fault when one does not vary.
Result<Eigen::VectorXd> normalise(Eigen::MatrixXd& inner, const Eigen::MatrixXd& triangle, Index n_rows) {
  Eigen::VectorXd norms(inner.cols());
  const double root_sum_of_weights = std::abs(triangle(0, 0));
  for (Index j = 0; j < inner.cols(); ++j) {
    norms(j) = inner.col(j).norm();
    // What the elimination of the intercept leaves of a column that is constant on these rows, away from its centre.
    const double rounding = static_cast<double>(n_rows) * kEpsilon * std::abs(triangle(0, j + 1));
    if (!does_vary(norms(j) / root_sum_of_weights, 1.0) || norms(j) <= rounding) {
      return dependent_column_error(j + 1, true);
    }
    inner.col(j) /= norms(j);
  }
  return norms;
}

/// γ of the standardised columns, intercept first.
Result<Eigen::VectorXd> pivoted_solution(const Eigen::MatrixXd& triangle, Index n_rows) {
  const Index k = triangle.rows() - 2;
  Eigen::VectorXd gamma(k + 1);
  gamma(0) = triangle(0, k + 1) / triangle(0, 0);
  if (k == 0) return gamma;
  Eigen::MatrixXd inner = triangle.block(1, 1, k, k).triangularView<Eigen::Upper>();
  const auto norms = normalise(inner, triangle, n_rows);
  if (!norms.ok()) return norms.error();
  const Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(inner);
  const auto pivots = qr.matrixQR().diagonal().cwiseAbs();
  const double threshold = static_cast<double>(n_rows) * kEpsilon * pivots(0);
  for (Index i = 0; i < k; ++i) {
    if (!(pivots(i) > threshold)) return dependent_column_error(qr.colsPermutation().indices()(i) + 1, false);
  }
  Eigen::VectorXd right = triangle.col(k + 1).segment(1, k);
  right.applyOnTheLeft(qr.householderQ().adjoint());
  qr.matrixQR().triangularView<Eigen::Upper>().solveInPlace(right);
  gamma.tail(k) = (qr.colsPermutation() * right).cwiseQuotient(*norms);
  gamma(0) -= triangle.row(0).segment(1, k).dot(gamma.tail(k)) / triangle(0, 0);
  return gamma;
}

}  // namespace

std::vector<Standard> standards_of(const Columns& columns) {
  std::vector<Standard> standards(1);
  for (Index j = 1; j < columns.x.cols(); ++j) standards.push_back(standard_of(columns.x.col(j)));
  standards.push_back(standard_of(columns.y));
  return standards;
}

Eigen::MatrixXd triangle_of(const Columns& columns, const std::vector<Standard>& standards) {
  const Index p = columns.x.cols();
  return fold(columns.x.rows(), p + 1, [&](Index start, Index count, Eigen::MatrixXd& block) {
    block.col(0).head(count).setOnes();
    for (Index j = 1; j <= p; ++j) {
      const auto& [centre, exponent] = standards[static_cast<std::size_t>(j)];
      const ConstVector column = j < p ? ConstVector(columns.x.col(j)) : columns.y;
      block.col(j).head(count) = (column.segment(start, count).array() - centre) * std::ldexp(1.0, -exponent);
    }
    if (columns.weights.size() != 0) {
      block.topRows(count).array().colwise() *= columns.weights.segment(start, count).array().sqrt();
    }
  });
}

Eigen::MatrixXd triangle_of(const Columns& columns, const std::vector<Standard>& standards,
                            std::span<const Index> rows) {
  const Index p = columns.x.cols();
  const bool weighted = columns.weights.size() != 0;
  Eigen::VectorXd root(static_cast<Index>(kRowBlock));
  return fold(static_cast<Index>(rows.size()), p + 1, [&](Index start, Index count, Eigen::MatrixXd& block) {
    const auto here = rows.subspan(static_cast<std::size_t>(start), static_cast<std::size_t>(count));
    for (Index r = 0; r < count; ++r) {
      root(r) = weighted ? std::sqrt(columns.weights(here[static_cast<std::size_t>(r)])) : 1.0;
    }
    block.col(0).head(count) = root.head(count);
    for (Index j = 1; j <= p; ++j) {
      const auto& [centre, exponent] = standards[static_cast<std::size_t>(j)];
      const double scale = std::ldexp(1.0, -exponent);
      const double* column = j < p ? columns.x.col(j).data() : columns.y.data();
      for (Index r = 0; r < count; ++r) {
        block(r, j) = root(r) * ((column[here[static_cast<std::size_t>(r)]] - centre) * scale);
      }
    }
  });
}

Result<TriangleSolution> solve_triangle(const Eigen::MatrixXd& triangle, const std::vector<Standard>& standards,
                                        Index n_rows) {
  const Index p = triangle.rows() - 1;
  if (n_rows < p) return too_few_rows_error(n_rows, p);
  auto gamma = pivoted_solution(triangle, n_rows);
  if (!gamma.ok()) return std::move(gamma).error();
  const auto& [y_centre, y_exponent] = standards.back();
  TriangleSolution solution{std::move(*gamma), 0.0, 0.0};
  solution.at_centre = std::ldexp(solution.coefficients(0), y_exponent);
  long double intercept = static_cast<long double>(y_centre) + solution.at_centre;
  for (Index j = 1; j < p; ++j) {
    const auto& [centre, exponent] = standards[static_cast<std::size_t>(j)];
    const double slope = std::ldexp(solution.coefficients(j), y_exponent - exponent);
    intercept -= static_cast<long double>(slope) * centre;
    solution.coefficients(j) = slope;
  }
  solution.coefficients(0) = static_cast<double>(intercept);
  const double root_rss = std::ldexp(triangle(p, p), y_exponent);
  solution.rss = n_rows == p ? 0.0 : root_rss * root_rss;
  return solution;
}

}  // namespace formsieve::fit

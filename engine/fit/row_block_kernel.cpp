#include "fit/row_block_kernel.hpp"

#include <Eigen/Core>

#include <cmath>

namespace formsieve::fit {

namespace {

using Column = Eigen::Map<Eigen::VectorXd>;

/// One reflection: x ↦ x − τ·u·(uᵀx), u = (1; v·unit), on (R_jc; B_c).
struct Reflection {
  double unit, tau;
};

void reflect(const Reflection& by, const Column& v, double& head, Column& column) {
  const double along = by.tau * (head + by.unit * v.dot(column));
  head -= along;
  column -= (along * by.unit) * v;
}

/// Folds in B, of which the first rows_at(j) rows may differ from zero in column j and are all that column j's
/// reflection touches.
template <class RowsAt>
void fold_in(double* triangle, double* below, std::size_t stride, std::size_t m, RowsAt rows_at) {
  for (std::size_t j = 0; j < m; ++j) {
    const auto rows = static_cast<Eigen::Index>(rows_at(j));
    const Column v(below + j * stride, rows);
    const double sum_of_squares = v.squaredNorm();
    if (sum_of_squares == 0.0) continue;
    double& diagonal = triangle[j * m + j];
    const double folded = -std::copysign(std::sqrt(diagonal * diagonal + sum_of_squares), diagonal);
    const Reflection by{1.0 / (diagonal - folded), (folded - diagonal) / folded};
    diagonal = folded;
    for (std::size_t c = j + 1; c < m; ++c) {
      Column column(below + c * stride, rows);
      reflect(by, v, triangle[c * m + j], column);
    }
  }
}

}  // namespace

void fold_in_rows(double* triangle, double* block, std::size_t n_rows, std::size_t m) {
  fold_in(triangle, block, kRowBlockStride, m, [n_rows](std::size_t) { return n_rows; });
}

void fold_in_triangle(double* triangle, double* other, std::size_t m) {
  fold_in(triangle, other, m, m, [](std::size_t j) { return j + 1; });
}

}  // namespace formsieve::fit

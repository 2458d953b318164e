#include "fit/row_block_kernel.hpp"

#include <Eigen/Core>

#include <cmath>

namespace formsieve::fit {

namespace {

using Column = Eigen::Map<Eigen::VectorXd, Eigen::Aligned16>;

/// One reflection: x ↦ x − τ·u·(uᵀx), u = (1; v·unit), on (R_jc; B_c).
struct Reflection {
  double unit, tau;
};

void reflect(const Reflection& by, const Column& v, double& head, Column& column) {
  const double along = by.tau * (head + by.unit * v.dot(column));
  head -= along;
  column -= (along * by.unit) * v;
}

}  // namespace

void fold_in_rows(double* triangle, double* block, std::size_t n_rows, std::size_t m) {
  const auto rows = static_cast<Eigen::Index>(n_rows);
  for (std::size_t j = 0; j < m; ++j) {
    const Column v(block + j * kRowBlockStride, rows);
    const double below = v.squaredNorm();
    if (below == 0.0) continue;
    double& diagonal = triangle[j * m + j];
    const double folded = -std::copysign(std::sqrt(diagonal * diagonal + below), diagonal);
    const Reflection by{1.0 / (diagonal - folded), (folded - diagonal) / folded};
    diagonal = folded;
    for (std::size_t c = j + 1; c < m; ++c) {
      Column column(block + c * kRowBlockStride, rows);
      reflect(by, v, triangle[c * m + j], column);
    }
  }
}

}  // namespace formsieve::fit

#include "checks/condition.hpp"

#include <Eigen/SVD>

namespace formsieve::checks {

namespace {

/// The design itself in the coordinates of the basis, X = Q·T.
Eigen::MatrixXd triangle_of(const Basis& basis) {
  const Eigen::Index k = basis.r.cols();
  Eigen::MatrixXd triangle = Eigen::MatrixXd::Zero(k + 1, k + 1);
  triangle(0, 0) = basis.intercept_length;
  if (k == 0) return triangle;
  triangle.block(0, 1, 1, k) = basis.intercept_length * basis.centre.transpose();
  triangle.bottomRightCorner(k, k) = basis.r * basis.length.asDiagonal();
  return triangle;
}

}  // namespace

Condition condition(const Basis& basis) {
  Eigen::MatrixXd scaled = triangle_of(basis);
  scaled.colwise().normalize();
  const Eigen::JacobiSVD<Eigen::MatrixXd> svd(scaled, Eigen::ComputeFullV);
  const Eigen::VectorXd& values = svd.singularValues();
  Condition result;
  result.index = values[0] * values.cwiseInverse();
  result.proportion = (svd.matrixV() * values.cwiseInverse().asDiagonal()).cwiseAbs2();
  result.proportion.array().colwise() /= result.proportion.rowwise().sum().array().eval();
  return result;
}

std::vector<Eigen::Index> entangled_columns(const Condition& condition) {
  constexpr double kHarmfulIndex = 30.0;
  constexpr double kHarmfulProportion = 0.5;
  const Eigen::Index p = condition.index.size();
  for (Eigen::Index k = p - 1; k >= 0 && condition.index[k] > kHarmfulIndex; --k) {
    std::vector<Eigen::Index> columns;
    for (Eigen::Index j = 1; j < p; ++j)
      if (condition.proportion(j, k) > kHarmfulProportion) columns.push_back(j);
    if (columns.size() >= 2) return columns;
  }
  return {};
}

}  // namespace formsieve::checks

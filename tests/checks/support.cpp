#include "support.hpp"

#include <Eigen/QR>

#include <cmath>
#include <numbers>
#include <numeric>
#include <stdexcept>

namespace formsieve::checks {

namespace {
using LongMatrix = Eigen::Matrix<long double, Eigen::Dynamic, Eigen::Dynamic>;
using LongVector = Eigen::Matrix<long double, Eigen::Dynamic, 1>;
}  // namespace

Fitted fit_by_long_double(const Eigen::MatrixXd& x, const Eigen::VectorXd& y, const Eigen::VectorXd& weights) {
  const Eigen::Index n = x.rows();
  const Eigen::Index p = x.cols();
  LongVector root = LongVector::Ones(n);
  if (weights.size() > 0) root = weights.cast<long double>().cwiseSqrt();
  LongMatrix whitened = root.asDiagonal() * x.cast<long double>();
  const LongVector lengths = whitened.colwise().norm();  // columns of very different size must not look dependent
  for (Eigen::Index j = 0; j < p; ++j) whitened.col(j) /= lengths[j];
  const LongVector target = root.cwiseProduct(y.cast<long double>());
  const Eigen::ColPivHouseholderQR<LongMatrix> qr(whitened);
  const LongVector beta = qr.solve(target).cwiseQuotient(lengths);
  const LongVector fitted = x.cast<long double>() * beta;
  const LongVector residuals = y.cast<long double>() - fitted;
  const LongMatrix q = qr.householderQ() * LongMatrix::Identity(n, p);

  Fitted result;
  result.x = x;
  result.y = y;
  result.weights = weights;
  result.coefficients = beta.cast<double>();
  result.fitted = fitted.cast<double>();
  result.residuals = residuals.cast<double>();
  result.leverage = q.rowwise().squaredNorm().cast<double>();
  result.sigma =
      std::sqrt(static_cast<double>(root.cwiseProduct(residuals).squaredNorm() / static_cast<long double>(n - p)));
  for (Eigen::Index j = 1; j < p; ++j) {
    result.term_first.push_back(static_cast<std::size_t>(j));
    result.term_names.push_back(std::string("x").append(std::to_string(j)));
  }
  return result;
}

Fitted line_through(const std::vector<double>& x, const std::vector<double>& y) {
  Eigen::MatrixXd design(static_cast<Eigen::Index>(x.size()), 2);
  design.col(0).setOnes();
  design.col(1) = vector_of(x);
  return fit_by_long_double(design, vector_of(y));
}

std::vector<std::size_t> row_order(Eigen::Index n) {
  std::vector<std::size_t> order(static_cast<std::size_t>(n));
  std::iota(order.begin(), order.end(), std::size_t{0});
  return order;
}

Eigen::VectorXd vector_of(const std::vector<double>& values) {
  return Eigen::Map<const Eigen::VectorXd>(values.data(), static_cast<Eigen::Index>(values.size()));
}

double Normals::uniform() {
  state_ = state_ * 6364136223846793005ULL + 1442695040888963407ULL;
  return (static_cast<double>(state_ >> 11U) + 0.5) / 9007199254740992.0;
}

double Normals::next() {
  const double radius = std::sqrt(-2.0 * std::log(uniform()));
  return radius * std::cos(2.0 * std::numbers::pi * uniform());
}

Eigen::VectorXd Normals::vector(Eigen::Index n) {
  Eigen::VectorXd values(n);
  for (double& value : values) value = next();
  return values;
}

Eigen::MatrixXd Normals::design(Eigen::Index n, Eigen::Index p) {
  Eigen::MatrixXd x(n, p);
  x.col(0).setOnes();
  for (Eigen::Index j = 1; j < p; ++j) x.col(j) = vector(n);
  return x;
}

const Check& check_named(const std::vector<Check>& checks, const std::string& name) {
  for (const Check& check : checks)
    if (check.name == name) return check;
  throw std::runtime_error("no check named " + name);
}

}  // namespace formsieve::checks

#include "proof/certified.hpp"

#include <cmath>
#include <limits>

namespace formsieve::proof {

namespace {

constexpr double kUnitRoundoff = std::numeric_limits<double>::epsilon() / 2;
/// Covers the roundings of the margin and of its subtraction, and multiplications by reciprocals in place of divisions.
constexpr double kMarginFactor = 2.0;

}  // namespace

bool CertifiedDifference::certify(const Reduced& problem, const Eigen::MatrixXd& d) {
  z_ = problem.m - d;
  const auto order = static_cast<double>(z_.rows());
  const double largest = z_.size() == 0 ? 0.0 : z_.cwiseAbs().maxCoeff();
  if (!std::isfinite(largest)) return false;
  entry_error_ = problem.entry_error + 2.0 * kUnitRoundoff * largest;
  const double margin = kMarginFactor * order * ((order + 3.0) * kUnitRoundoff * largest + entry_error_);
  factor_.set_lower(z_);
  factor_.matrix().diagonal().array() -= margin;
  return factor_lower(factor_);
}

Eigen::VectorXd CertifiedDifference::solve(const Eigen::VectorXd& right) const {
  Eigen::VectorXd padded = Eigen::VectorXd::Zero(static_cast<Eigen::Index>(factor_.padded_order()));
  padded.head(right.size()) = right;
  solve_lower(factor_, padded.data());
  solve_transposed(factor_, padded.data());
  return padded.head(right.size());
}

Eigen::MatrixXd CertifiedDifference::inverse() const {
  PaddedMatrix work;
  PaddedMatrix lower;
  invert_factored(factor_, work, lower);
  Eigen::MatrixXd inverse = lower.matrix();
  inverse.triangularView<Eigen::StrictlyUpper>() = inverse.transpose();
  return inverse;
}

double CertifiedDifference::pivot_ratio() const {
  const auto pivots = factor_.matrix().diagonal().array();
  const double ratio = pivots.minCoeff() / pivots.maxCoeff();
  return ratio * ratio;
}

}  // namespace formsieve::proof

#include "proof/certified.hpp"

#include <cmath>
#include <limits>

namespace formsieve::proof {

namespace {

constexpr double kUnitRoundoff = std::numeric_limits<double>::epsilon() / 2;
/// Covers the roundings of the margin itself and of its subtraction.
constexpr double kMarginFactor = 2.0;

}  // namespace

bool CertifiedDifference::certify(const Reduced& problem, const Eigen::MatrixXd& d) {
  z_ = problem.m - d;
  const auto order = static_cast<double>(z_.rows());
  const double largest = z_.size() == 0 ? 0.0 : z_.cwiseAbs().maxCoeff();
  if (!std::isfinite(largest)) return false;
  entry_error_ = problem.entry_error + 2.0 * kUnitRoundoff * largest;
  const double margin = kMarginFactor * order * ((order + 3.0) * kUnitRoundoff * largest + entry_error_);
  shifted_ = z_;
  shifted_.diagonal().array() -= margin;
  factor_.compute(shifted_);
  if (factor_.info() != Eigen::Success) return false;
  return z_.size() == 0 || factor_.matrixLLT().diagonal().minCoeff() > 0.0;
}

double CertifiedDifference::pivot_ratio() const {
  const auto pivots = factor_.matrixLLT().diagonal().array();
  const double ratio = pivots.minCoeff() / pivots.maxCoeff();
  return ratio * ratio;
}

}  // namespace formsieve::proof

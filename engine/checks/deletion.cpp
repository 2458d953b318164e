#include "checks/deletion.hpp"

#include <boost/math/distributions/students_t.hpp>

#include <algorithm>
#include <cmath>

namespace formsieve::checks {

namespace {

/// Residuals times √w over σ.
Eigen::ArrayXd scaled_residuals(const Subject& subject) {
  Eigen::ArrayXd scaled = subject.residuals.array() / subject.sigma;
  if (subject.weights.size() > 0) scaled *= subject.weights.array().sqrt();
  return scaled;
}

double degrees_of_freedom(const Subject& subject) { return static_cast<double>(subject.x.rows() - subject.x.cols()); }

}  // namespace

Eigen::VectorXd cook_distances(const Subject& subject) {
  const Eigen::ArrayXd h = subject.leverage.array();
  const double p = static_cast<double>(subject.x.cols());
  return (h < kFullLeverage).select(scaled_residuals(subject).square() * h / (p * (1.0 - h).square()), 0.0);
}

Eigen::VectorXd externally_studentised(const Subject& subject) {
  constexpr double kLeastLeft = 1e-15;  // share of the residual sum of squares that is rounding
  const Eigen::ArrayXd h = subject.leverage.array();
  const double df = degrees_of_freedom(subject);
  const Eigen::ArrayXd internal = scaled_residuals(subject) / (1.0 - h).max(1.0 - kFullLeverage).sqrt();
  const Eigen::ArrayXd left = (1.0 - internal.square() / df).max(kLeastLeft);
  return (h < kFullLeverage).select(internal * ((df - 1.0) / (df * left)).sqrt(), 0.0);
}

Eigen::VectorXd rss_without(const Subject& subject) {
  const Eigen::ArrayXd h = subject.leverage.array();
  const double variance = subject.sigma * subject.sigma;
  const double rss = variance * degrees_of_freedom(subject);
  const Eigen::ArrayXd lost = variance * scaled_residuals(subject).square() / (1.0 - h).max(1.0 - kFullLeverage);
  return (h < kFullLeverage).select((rss - lost).max(0.0), rss);
}

std::optional<double> outlier_p(const Subject& subject, double studentised) {
  const double df = degrees_of_freedom(subject) - 1.0;
  if (df < 1.0) return std::nullopt;
  const boost::math::students_t distribution(df);
  const double one = 2.0 * boost::math::cdf(boost::math::complement(distribution, std::abs(studentised)));
  return std::min(1.0, one * static_cast<double>(subject.x.rows()));
}

}  // namespace formsieve::checks

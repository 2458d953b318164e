#include "checks/shapiro_wilk.hpp"

#include "checks/workings.hpp"

#include <boost/math/distributions/normal.hpp>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

namespace formsieve::checks {

namespace {

// Coefficients of Royston 1995, rising powers, by their names in AS R94.
constexpr std::array kC1{0.0, 0.221157, -0.147981, -2.07119, 4.434685, -2.706056};
constexpr std::array kC2{0.0, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633};
constexpr std::array kC3{0.544, -0.39978, 0.025054, -6.714e-4};
constexpr std::array kC4{1.3822, -0.77857, 0.062767, -0.0020322};
constexpr std::array kC5{-1.5861, -0.31082, -0.083751, 0.0038915};
constexpr std::array kC6{-0.4803, -0.082676, 0.0030302};
constexpr std::array kG{-2.273, 0.459};

template <std::size_t N>
double polynomial(const std::array<double, N>& coefficients, double x) {
  double value = 0.0;
  for (std::size_t i = N; i-- > 0;) value = value * x + coefficients[i];
  return value;
}

/// p for n = 3, exact: (6/π)(asin √W − asin √¾).
double p_of_three(double w) {
  return std::max(0.0, 6.0 / std::numbers::pi * (std::asin(std::sqrt(w)) - std::numbers::pi / 3.0));
}

/// Blom's approximate expected values of normal order statistics.
Eigen::VectorXd blom_scores(Eigen::Index n) {
  const boost::math::normal standard;
  Eigen::VectorXd scores(n);
  for (Eigen::Index i = 0; i < n / 2; ++i) {
    const double share = (static_cast<double>(i) + 1.0 - 0.375) / (static_cast<double>(n) + 0.25);
    scores[i] = boost::math::quantile(standard, share);
    scores[n - 1 - i] = -scores[i];
  }
  if (n % 2 == 1) scores[n / 2] = 0.0;
  return scores;
}

}  // namespace

double shapiro_wilk_p(double one_minus_w, Eigen::Index n_rows) {
  const double n = static_cast<double>(n_rows);
  if (n == 3.0) return p_of_three(1.0 - one_minus_w);
  constexpr double kSmallSamples = 11.0;  // where Royston changes from one normalising transformation to the other
  double y = std::log(one_minus_w);
  double mean = 0.0;
  double sd = 1.0;
  if (n <= kSmallSamples) {
    const double gamma = polynomial(kG, n);
    if (y >= gamma) return 0.0;  // beyond the support of the approximation
    y = -std::log(gamma - y);
    mean = polynomial(kC3, n);
    sd = std::exp(polynomial(kC4, n));
  } else {
    mean = polynomial(kC5, std::log(n));
    sd = std::exp(polynomial(kC6, std::log(n)));
  }
  return boost::math::cdf(boost::math::complement(boost::math::normal(mean, sd), y));
}

Eigen::VectorXd shapiro_wilk_weights(Eigen::Index n) {
  if (n == 3) return Eigen::Vector3d(-std::numbers::sqrt2 / 2.0, 0.0, std::numbers::sqrt2 / 2.0);
  constexpr Eigen::Index kOneExtremeUpTo = 5;  // above, the second largest weight has its own polynomial too
  const Eigen::VectorXd m = blom_scores(n);
  const double length2 = m.squaredNorm();
  const double u = 1.0 / std::sqrt(static_cast<double>(n));
  const double last = m[n - 1] / std::sqrt(length2) + polynomial(kC1, u);
  const double last_but_one = m[n - 2] / std::sqrt(length2) + polynomial(kC2, u);
  double left = length2 - 2.0 * m[n - 1] * m[n - 1];
  double share = 1.0 - 2.0 * last * last;
  if (n > kOneExtremeUpTo) {
    left -= 2.0 * m[n - 2] * m[n - 2];
    share -= 2.0 * last_but_one * last_but_one;
  }
  Eigen::VectorXd weights = m / std::sqrt(left / share);
  weights[n - 1] = last;
  weights[0] = -last;
  if (n > kOneExtremeUpTo) {
    weights[n - 2] = last_but_one;
    weights[1] = -last_but_one;
  }
  return weights;
}

std::optional<ShapiroWilk> shapiro_wilk(const Eigen::Ref<const Eigen::VectorXd>& x) {
  const Eigen::Index n = x.size();
  if (n < kFewestShapiroRows || n > kMostShapiroRows) return std::nullopt;
  Eigen::VectorXd sorted = centred(x);
  std::sort(sorted.begin(), sorted.end());
  const double range = sorted[n - 1] - sorted[0];
  if (!(range > 0.0)) return std::nullopt;
  sorted /= range;
  const Eigen::VectorXd weights = shapiro_wilk_weights(n);
  // 1 − W through its factors: W itself would lose the digits of a value near 1
  const double explained = weights.dot(sorted) / weights.norm();
  const double length = sorted.norm();
  const double one_minus_w = std::max((length - explained) * (length + explained) / (length * length), 0.0);
  if (one_minus_w == 0.0) return ShapiroWilk{1.0, 1.0};
  return ShapiroWilk{1.0 - one_minus_w, std::clamp(shapiro_wilk_p(one_minus_w, n), 0.0, 1.0)};
}

}  // namespace formsieve::checks

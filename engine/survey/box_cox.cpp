#include "survey/box_cox.hpp"

#include <algorithm>
#include <boost/math/tools/minima.hpp>
#include <cmath>
#include <cstdint>
#include <utility>

#include "base/sums.hpp"
#include "survey/order_statistics.hpp"

namespace formsieve::survey {

namespace {

/// Half the bits of a double: a minimum is flat, so that more cannot be told from its values.
constexpr int kBits = 26;
/// Brent's method needs about 20 steps; so many mean that something is wrong.
constexpr std::uintmax_t kMostSteps = 200;
/// Within this of an end of the range the minimiser has run into the end.
constexpr double kAtTheEnd = 1e-5;
/// Exponents up to this are taken as they are; their squares, summed over any number of rows, stay in range.
constexpr double kSafeExponent = 300.0;

/// ln(x/origin), to full relative accuracy also where the two are close.
double log_ratio(double x, double origin) {
  const double difference = x - origin;
  return std::abs(difference) < 0.5 * origin ? std::log1p(difference / origin) : std::log(x) - std::log(origin);
}

double log_variance(const std::vector<double>& values) {
  const double mean = base::mean(values);
  return std::log(base::sum_of_squares(values, mean) / static_cast<double>(values.size()));
}

}  // namespace

BoxCoxLikelihood::BoxCoxLikelihood(std::span<const double> positive) : logs_(positive.size()) {
  if (positive.empty()) return;
  const double origin = positive[positive.size() / 2];
  std::transform(positive.begin(), positive.end(), logs_.begin(), [&](double x) { return log_ratio(x, origin); });
  const double mean = base::mean(logs_);
  for (double& u : logs_) u -= mean;
  const auto [low, high] = std::minmax_element(logs_.begin(), logs_.end());
  smallest_log_ = *low;
  largest_log_ = *high;
}

double BoxCoxLikelihood::operator()(double lambda) const {
  const double half_n = 0.5 * static_cast<double>(logs_.size());
  if (lambda == 0.0) return -half_n * log_variance(logs_);
  std::vector<double> z(logs_.size());
  const double largest = std::max(lambda * smallest_log_, lambda * largest_log_);
  if (largest < kSafeExponent) {
    std::transform(logs_.begin(), logs_.end(), z.begin(), [&](double u) { return std::expm1(lambda * u) / lambda; });
    return -half_n * log_variance(z);
  }
  // exp(λu)/λ, its largest value taken out as a factor and put back as twice its logarithm.
  std::transform(logs_.begin(), logs_.end(), z.begin(), [&](double u) { return std::exp(lambda * u - largest); });
  return -half_n * (2.0 * (largest - std::log(std::abs(lambda))) + log_variance(z));
}

std::optional<double> box_cox_lambda(std::span<const double> sorted_positive) {
  if (count_distinct(sorted_positive) < 3) return std::nullopt;
  const BoxCoxLikelihood likelihood(sorted_positive);
  const auto minus = [&](double lambda) { return -likelihood(lambda); };
  std::uintmax_t steps = kMostSteps;
  const double found = boost::math::tools::brent_find_minima(minus, kLowestLambda, kHighestLambda, kBits, steps).first;
  for (const double end : {kLowestLambda, kHighestLambda})
    if (std::abs(found - end) < kAtTheEnd && likelihood(end) >= likelihood(found)) return end;
  return found;
}

}  // namespace formsieve::survey

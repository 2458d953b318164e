#include "survey/order_statistics.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

#include "base/sums.hpp"

namespace formsieve::survey {

namespace {

constexpr double kOutlyingScore = 3.5;  // Iglewicz & Hoaglin 1993
constexpr double kNormalMad = 0.6745;   // MAD of a standard normal variable, rounded as in their rule
constexpr double kNormalMeanDeviation =
    1.253314;  // √(π/2): standard deviation over mean deviation of a normal variable

/// |x − median| for every value, halved where a difference could overflow (scores do not feel a common factor).
std::vector<double> absolute_deviations(std::span<const double> sorted, double median) {
  const double factor = std::max(std::abs(sorted.front()), std::abs(sorted.back())) > 0x1p1022 ? 0.25 : 1.0;
  std::vector<double> out(sorted.size());
  std::transform(sorted.begin(), sorted.end(), out.begin(),
                 [&](double x) { return std::abs(x * factor - median * factor); });
  return out;
}

double median_of(std::vector<double> values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  return values.size() % 2 == 1 ? *middle : std::midpoint(*std::max_element(values.begin(), middle), *middle);
}

/// Mean without overflow: of the values divided by the largest.
double safe_mean(const std::vector<double>& values) {
  const double largest = *std::max_element(values.begin(), values.end());
  if (largest == 0.0) return 0.0;
  std::vector<double> unit(values.size());
  std::transform(values.begin(), values.end(), unit.begin(), [&](double x) { return x / largest; });
  return base::mean(unit) * largest;
}

}  // namespace

double quantile(std::span<const double> sorted, double probability) {
  const double place = static_cast<double>(sorted.size() - 1) * probability;
  const auto low = static_cast<std::size_t>(place);
  const std::size_t high = std::min(low + 1, sorted.size() - 1);
  return std::lerp(sorted[low], sorted[high], place - static_cast<double>(low));
}

std::size_t count_distinct(std::span<const double> sorted) {
  if (sorted.empty()) return 0;
  std::size_t count = 1;
  for (std::size_t i = 1; i < sorted.size(); ++i) count += sorted[i] != sorted[i - 1] ? 1 : 0;
  return count;
}

Outlying count_outlying(std::span<const double> sorted) {
  Outlying out;
  if (count_distinct(sorted) < 3) return out;
  const std::vector<double> deviations = absolute_deviations(sorted, quantile(sorted, 0.5));
  const double mad = median_of(deviations);
  out.by_mean_deviation = mad == 0.0;
  const double factor = out.by_mean_deviation ? 1.0 / kNormalMeanDeviation : kNormalMad;
  const double spread = out.by_mean_deviation ? safe_mean(deviations) : mad;
  out.n = static_cast<std::size_t>(std::count_if(deviations.begin(), deviations.end(),
                                                 [&](double d) { return factor * d / spread > kOutlyingScore; }));
  return out;
}

}  // namespace formsieve::survey

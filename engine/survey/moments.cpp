#include "survey/moments.hpp"

#include "base/sums.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace formsieve::survey {

namespace {

/// Exponents beyond this are cut: what remains is far from the ends of the range even in a fourth power, and 2 to this
/// power and its inverse are both normal numbers.
constexpr int kLargestExponent = 1000;

/// The power of two (never subnormal) that divides `magnitude` to between 1 and 2, exponent cut as above; 1 for zero.
double power_of_two_near(double magnitude) {
  if (magnitude == 0.0) return 1.0;
  return std::ldexp(1.0, std::clamp(std::ilogb(magnitude), -kLargestExponent, kLargestExponent));
}

double largest_magnitude(std::span<const double> values) {
  double largest = 0.0;
  for (const double x : values) largest = std::max(largest, std::abs(x));
  return largest;
}

/// Independent accumulators of one chunk: lets the processor overlap additions, in an order that is ours.
constexpr std::size_t kLanes = 4;

/// Σ over the values of the powers that `term` returns, by fixed chunks and lanes.
template <std::size_t kPowers, class Term>
std::array<double, kPowers> lane_sums(std::span<const double> values, Term term) {
  std::array<double, kPowers> total{};
  for (std::size_t start = 0; start < values.size(); start += base::kRowChunk) {
    const auto chunk = values.subspan(start, std::min(base::kRowChunk, values.size() - start));
    std::array<std::array<double, kLanes>, kPowers> lanes{};
    for (std::size_t i = 0; i < chunk.size(); ++i) {
      const std::array<double, kPowers> powers = term(chunk[i]);
      for (std::size_t power = 0; power < kPowers; ++power) lanes[power][i % kLanes] += powers[power];
    }
    for (std::size_t power = 0; power < kPowers; ++power)
      total[power] += (lanes[power][0] + lanes[power][1]) + (lanes[power][2] + lanes[power][3]);
  }
  return total;
}

double chunked_mean(std::span<const double> values) {
  return lane_sums<1>(values, [](double x) { return std::array<double, 1>{x}; })[0] /
         static_cast<double>(values.size());
}

}  // namespace

Deviations deviations(std::span<const double> values) {
  Deviations out;
  if (values.empty()) return out;
  out.base = power_of_two_near(largest_magnitude(values));
  const double to_unit = 1.0 / out.base;
  out.values.resize(values.size());
  std::transform(values.begin(), values.end(), out.values.begin(), [&](double x) { return x * to_unit; });

  const auto [low, high] = std::minmax_element(out.values.begin(), out.values.end());
  // The mean of equal values need not be that value once rounded; their deviations would then be rounding noise.
  const double origin = *low == *high ? *low : chunked_mean(out.values);
  for (double& x : out.values) x -= origin;

  out.scale = power_of_two_near(largest_magnitude(out.values));
  for (double& x : out.values) x /= out.scale;
  const double rest = chunked_mean(out.values);
  for (double& x : out.values) x -= rest;
  out.mean = (origin + rest * out.scale) * out.base;
  return out;
}

Moments moments(std::span<const double> values) {
  Moments out;
  out.n = values.size();
  if (values.empty()) return out;
  const Deviations centred = deviations(values);
  out.mean = centred.mean;
  const auto [two, three, four] = lane_sums<3>(centred.values, [](double d) {
    const double square = d * d;
    return std::array<double, 3>{square, square * d, square * square};
  });
  if (two == 0.0) return out;

  const double n = static_cast<double>(values.size());
  out.sd = std::sqrt(two / (n - 1.0)) * centred.scale * centred.base;
  const double m2 = two / n;
  if (values.size() >= 3) out.skewness = std::sqrt(n * (n - 1.0)) / (n - 2.0) * (three / n) / (m2 * std::sqrt(m2));
  if (values.size() >= 4) {
    const double g2 = (four / n) / (m2 * m2) - 3.0;
    out.excess_kurtosis = (n - 1.0) / ((n - 2.0) * (n - 3.0)) * ((n + 1.0) * g2 + 6.0);
  }
  return out;
}

}  // namespace formsieve::survey

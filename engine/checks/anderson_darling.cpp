#include "checks/anderson_darling.hpp"

#include "checks/workings.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace formsieve::checks {

namespace {

/// ln of the normal upper tail; beyond z = 30 by the asymptotic series, since erfc underflows at 38 and a standardised
/// residual can reach √n.
double log_upper_tail(double z) {
  constexpr double kSeriesFrom = 30.0;  // the first term left out is 105/z⁸ = 2e-10 of a correction to −450
  if (z < kSeriesFrom) return std::log(0.5 * std::erfc(z / std::numbers::sqrt2));
  const double u = 1.0 / (z * z);
  return -0.5 * z * z - std::log(z) - 0.5 * std::log(2.0 * std::numbers::pi) +
         std::log1p(-u * (1.0 - u * (3.0 - 15.0 * u)));
}

}  // namespace

double anderson_darling_p(double a2_adjusted) {
  constexpr double kTableEnd = 13.0;  // the last polynomial turns upward at 153; nobody vouches for it beyond 13
  const double a = std::min(a2_adjusted, kTableEnd);
  if (a < 0.2) return -std::expm1(-13.436 + a * (101.14 - 223.73 * a));
  if (a < 0.34) return -std::expm1(-8.318 + a * (42.796 - 59.938 * a));
  if (a < 0.6) return std::exp(0.9177 - a * (4.279 + 1.38 * a));
  return std::exp(1.2937 - a * (5.709 - 0.0186 * a));
}

std::optional<AndersonDarling> anderson_darling(const Eigen::Ref<const Eigen::VectorXd>& x) {
  const Eigen::Index n = x.size();
  if (n < 3) return std::nullopt;
  const double count = static_cast<double>(n);
  Eigen::VectorXd z = centred(x);
  const double sd = z.stableNorm() / std::sqrt(count - 1.0);
  if (!(sd > 0.0)) return std::nullopt;
  z /= sd;
  std::sort(z.begin(), z.end());
  double total = 0.0;
  for (Eigen::Index i = 0; i < n; ++i) {
    const double below = log_upper_tail(-z[i]);
    const double above = log_upper_tail(z[n - 1 - i]);
    total += (2.0 * static_cast<double>(i) + 1.0) * (below + above);
  }
  AndersonDarling result;
  result.a2 = -count - total / count;
  result.a2_adjusted = result.a2 * (1.0 + 0.75 / count + 2.25 / (count * count));
  result.p = std::clamp(anderson_darling_p(result.a2_adjusted), 0.0, 1.0);
  return result;
}

}  // namespace formsieve::checks

#include "survey/resolution.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <optional>

namespace formsieve::survey {

namespace {

/// A double carries 15 decimal digits for certain; every power of ten up to here is exact.
constexpr std::array<double, 16> kPowersOfTen = {1e0, 1e1, 1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                                 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15};

/// 0.1 + 0.2 is one unit in the last place from 0.3; a few such additions are forgiven …
constexpr double kForgivenRel = 4.0 * std::numeric_limits<double>::epsilon();
/// … as long as that is far less than the unit in question, else every large number would pass.
constexpr double kForgivenUnits = 1e-3;
/// Beyond it doubles are whole, so that a multiple of a unit cannot be told from its neighbours.
constexpr double kAllWhole = 0x1p53;

bool multiple_of_unit(double x, double units_per_one) {
  const double units = x * units_per_one;
  if (std::abs(units) >= kAllWhole) return true;
  // The nearest double to a decimal fraction is its whole number of units divided by a power of ten, rounded once.
  const double nearest = std::nearbyint(units) / units_per_one;
  return std::abs(nearest - x) <= std::min(kForgivenRel * std::abs(x), kForgivenUnits / units_per_one);
}

std::optional<std::size_t> decimals_of(double x) {
  for (std::size_t decimals = 0; decimals < kPowersOfTen.size(); ++decimals)
    if (multiple_of_unit(x, kPowersOfTen[decimals])) return decimals;
  return std::nullopt;
}

}  // namespace

double resolution(std::span<const double> values) {
  if (values.empty()) return 0.0;
  std::size_t decimals = 0;
  for (const double x : values) {
    if (multiple_of_unit(x, kPowersOfTen[decimals])) continue;
    const std::optional<std::size_t> needed = decimals_of(x);
    if (!needed) return 0.0;
    decimals = std::max(decimals, *needed);
  }
  return 1.0 / kPowersOfTen[decimals];
}

}  // namespace formsieve::survey

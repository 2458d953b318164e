// Spread of the residuals by thirds of some value: the sizes of the checks of equal spread.
#pragma once

#include "checks/workings.hpp"

#include <Eigen/Core>

#include <optional>
#include <vector>

namespace formsieve::checks {

/// A third of fewer rows has no standard deviation worth the name.
inline constexpr Eigen::Index kFewestRowsInThird = 3;
/// Ratios beyond this (a third without any spread) are cut off here.
inline constexpr double kLargestRatio = 1e6;

/// Rows by thirds of a value, each in row order: ⌊n/3⌋ smallest, the rest, ⌊n/3⌋ largest; ties go by row.
struct Thirds {
  std::vector<Eigen::Index> bottom, middle, top;
};
/// Cost O(n).
Thirds thirds_of(const Eigen::Ref<const Eigen::VectorXd>& value);

/// Standard deviation of the (whitened) residuals in the top third of `value` over that in the bottom third. Unset with
/// too few rows, or without spread in both.
std::optional<double> spread_ratio(const Workings& workings, const Eigen::Ref<const Eigen::VectorXd>& value);

/// high/low, at most kLargestRatio; unset when both are 0.
std::optional<double> bounded_ratio(double high, double low);

/// max(ratio, 1/ratio).
double unevenness(double ratio);

/// Squared residuals over their mean, centred; empty when they are all equal.
Eigen::VectorXd centred_squares(const Workings& workings);

}  // namespace formsieve::checks

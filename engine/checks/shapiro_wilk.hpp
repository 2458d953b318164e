// Shapiro–Wilk test of normality by Royston's approximation.
#pragma once

#include <Eigen/Core>

#include <optional>

namespace formsieve::checks {

/// Rows for which Royston's p-value holds.
inline constexpr Eigen::Index kFewestShapiroRows = 3;
inline constexpr Eigen::Index kMostShapiroRows = 5000;

struct ShapiroWilk {
  double w = 1.0;
  double p = 1.0;
};

/// W and its p-value by Royston 1995 (Applied Statistics algorithm R94), in double precision. Unset outside
/// 3 ≤ n ≤ 5,000 and when the values have no spread. Cost O(n log n).
std::optional<ShapiroWilk> shapiro_wilk(const Eigen::Ref<const Eigen::VectorXd>& x);

/// p-value of W for n values by the same approximation; `one_minus_w` rather than W, which would lose its digits
/// near 1.
double shapiro_wilk_p(double one_minus_w, Eigen::Index n);

/// Royston's approximation to the Shapiro–Wilk weights, antisymmetric, unit length: entry i belongs to the i-th
/// smallest value and is negative in the lower half. n ≥ 3.
Eigen::VectorXd shapiro_wilk_weights(Eigen::Index n);

}  // namespace formsieve::checks

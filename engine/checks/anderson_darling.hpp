// Anderson–Darling test of normality with mean and spread estimated.
#pragma once

#include <Eigen/Core>

#include <optional>

namespace formsieve::checks {

struct AndersonDarling {
  double a2 = 0.0;           ///< A², with the standard deviation of divisor n − 1
  double a2_adjusted = 0.0;  ///< A* = A²(1 + 0.75/n + 2.25/n²)
  double p = 1.0;
};

/// p-value of A* with both parameters estimated, D'Agostino & Stephens 1986, Table 4.9.
double anderson_darling_p(double a2_adjusted);

/// Stephens in D'Agostino & Stephens 1986, case 3 (both parameters estimated), p-value by their Table 4.9. Beyond
/// A* = 13 the p-value is that at 13, 5e-31, an upper bound; below 1e-10 it is a number, not a probability. Unset for
/// fewer than 3 values or none of spread. Cost O(n log n).
std::optional<AndersonDarling> anderson_darling(const Eigen::Ref<const Eigen::VectorXd>& x);

}  // namespace formsieve::checks

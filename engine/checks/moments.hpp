// Moment skewness and kurtosis of residuals (Joanes & Gill 1998).
#pragma once

#include <Eigen/Core>

namespace formsieve::checks {

/// The moment coefficients g1 = m3/m2^{3/2} and g2 = m4/m2² − 3, and their small-sample forms
/// G1 = g1·√(n(n−1))/(n−2) and G2 = (n−1)/((n−2)(n−3))·((n+1)g2 + 6). All 0 when the values have no spread; G1 needs
/// n ≥ 3 and G2 n ≥ 4, and they are 0 below that.
struct Moments {
  double skewness = 0.0, skewness_adjusted = 0.0;
  double excess_kurtosis = 0.0, excess_kurtosis_adjusted = 0.0;
};
Moments moments(const Eigen::Ref<const Eigen::VectorXd>& x);

}  // namespace formsieve::checks

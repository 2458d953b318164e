// Whether the square and cube of some curve add to a fit.
#pragma once

#include "checks/workings.hpp"

#include <Eigen/Core>

namespace formsieve::checks {

/// RESET (Ramsey 1969) with the powers of any curve. df 0 when there is nothing to test.
struct Bend {
  double f = 0.0;
  double df1 = 0.0;  ///< 2, or 1 or 0 where the design holds the powers already
  double df2 = 0.0;  ///< residual degrees of freedom with the powers; below 1 there is no test
  double p = 1.0;
  double gain_r2 = 0.0;        ///< rise of R²
  double gain_variance = 0.0;  ///< fall of the estimated residual variance, as a share of it; 0 where it does not fall

  bool tested() const { return df1 > 0.0 && df2 >= 1.0; }
};

/// Adds square and cube of `curve` [n] to the design. F is exact with normal errors when the curve depends on the
/// fitted values alone. Requires workings.of_the_fit().full_rank. Cost O(n k).
Bend bend_along(const Workings& workings, const Eigen::Ref<const Eigen::VectorXd>& curve);

}  // namespace formsieve::checks

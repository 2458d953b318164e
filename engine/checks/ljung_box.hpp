// Autocorrelation of residuals at several lags together.
#pragma once

#include <Eigen/Core>

#include <optional>

namespace formsieve::checks {

struct LjungBox {
  double q = 0.0;
  double df = 0.0;  ///< lags
  double p = 1.0;
  Eigen::VectorXd autocorrelation;  ///< [lags] r_1, r_2, …
};

/// Ljung & Box 1978: Q = n(n + 2) Σ r_k²/(n − k) over k = 1 … lags, against χ²(lags); r_k about the mean. Unset when
/// the values have no spread or there are not more of them than lags. Cost O(n·lags).
std::optional<LjungBox> ljung_box(const Eigen::Ref<const Eigen::VectorXd>& residuals, Eigen::Index lags);

}  // namespace formsieve::checks

#include "checks/moments.hpp"

#include "checks/workings.hpp"

#include <cmath>

namespace formsieve::checks {

Moments moments(const Eigen::Ref<const Eigen::VectorXd>& x) {
  Moments result;
  if (x.size() < 2) return result;
  const double n = static_cast<double>(x.size());
  Eigen::ArrayXd deviation = centred(x).array();
  const double largest = deviation.abs().maxCoeff();
  if (!(largest > 0.0)) return result;
  deviation /= largest;  // fourth powers of tiny or huge residuals would leave the range of a double
  const double m2 = deviation.square().mean();
  const double m3 = deviation.cube().mean();
  const double m4 = deviation.square().square().mean();
  result.skewness = m3 / (m2 * std::sqrt(m2));
  result.excess_kurtosis = m4 / (m2 * m2) - 3.0;
  if (n >= 3.0) result.skewness_adjusted = result.skewness * std::sqrt(n * (n - 1.0)) / (n - 2.0);
  if (n >= 4.0)
    result.excess_kurtosis_adjusted = (n - 1.0) / ((n - 2.0) * (n - 3.0)) * ((n + 1.0) * result.excess_kurtosis + 6.0);
  return result;
}

}  // namespace formsieve::checks

#include "backtransform/normal_theory.hpp"

#include "backtransform/gauss_hermite.hpp"

#include <cmath>
#include <limits>
#include <numbers>

namespace formsieve::backtransform {

namespace {

using forms::Kind;

/// E max(η + sd·Z, 0)² = (η² + sd²)·Φ(η/sd) + η·sd·φ(η/sd).
double mean_clamped_square(double eta, double sd) {
  if (sd == 0.0) return eta > 0.0 ? eta * eta : 0.0;
  const double t = eta / sd;
  const double below = 0.5 * std::erfc(-t / std::numbers::sqrt2);
  const double density = std::exp(-0.5 * t * t) * std::numbers::inv_sqrtpi / std::numbers::sqrt2;
  const double standard = (t * t + 1.0) * below + t * density;
  return sd * sd * (standard < 0.0 ? 0.0 : standard);  // rounding, where nearly all is below the edge
}

}  // namespace

NormalMean::NormalMean(const forms::Form& response, double sigma)
    : plain_(plain_form(response)), kind_(plain_kind(response)), back_(response), sigma_(sigma) {}

double NormalMean::operator()(double eta, double weight) const {
  const double mean = back_(mean_argument(eta, sigma_ / std::sqrt(weight)));
  return std::isfinite(mean) ? mean : std::numeric_limits<double>::quiet_NaN();
}

double NormalMean::mean_argument(double eta, double sd) const {
  switch (kind_) {
    case Kind::identity:
      return eta + 0.0 * sd;  // NaN without degrees of freedom, like every other
    case Kind::ln:
      return std::exp(eta + 0.5 * sd * sd);
    case Kind::log10:
      return std::pow(10.0, eta + 0.5 * std::numbers::ln10 * sd * sd);
    case Kind::sqrt:
      return mean_clamped_square(eta, sd);
    default:
      return by_quadrature(eta, sd);
  }
}

double NormalMean::by_quadrature(double eta, double sd) const {
  const NormalRule& rule = normal_rule();
  double total = 0.0;
  for (Eigen::Index k = 0; k < kNodes; ++k) total += rule.weights[k] * forms::inverse(plain_, eta + sd * rule.nodes[k]);
  return total;
}

}  // namespace formsieve::backtransform

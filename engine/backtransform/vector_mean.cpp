#include "backtransform/vector_mean.hpp"

#include <cmath>
#include <limits>
#include <numbers>

namespace formsieve::backtransform {

namespace {

using forms::Kind;
using Residuals = Eigen::Map<const Eigen::ArrayXd>;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Below this power ln(1 + λz) loses too many digits of λz: an error of ε/λ in ln y.
constexpr double kSmallestPower = 0.05;

/// h(z) = (1 + λz)^(1/λ), the inverse of Box & Cox 1964.
std::optional<double> box_cox_mean(double lambda, const Residuals& e, double eta, double root, double smallest) {
  if (std::abs(lambda) < kSmallestPower) return std::nullopt;
  // The largest argument matters for λ < 0, the smallest for λ > 0.
  const auto base = 1.0 + lambda * (e * root + eta);
  const double least = lambda > 0.0 ? 1.0 + lambda * smallest : base.minCoeff();
  if (!(least > 0.0)) return std::nullopt;
  return (base.log() / lambda).exp().mean();
}

}  // namespace

std::optional<double> vector_mean(const forms::Form& plain, Kind kind, const Residuals& residuals, double eta,
                                  double root, double smallest) {
  const auto arguments = residuals * root + eta;
  const bool all_positive = smallest > 0.0;
  switch (kind) {
    case Kind::ln:
      return std::exp(eta) * (residuals * root).exp().mean();
    case Kind::log10:
      return std::pow(10.0, eta) * (residuals * (root * std::numbers::ln10)).exp().mean();
    case Kind::logit:
      return (1.0 + (-arguments).exp()).inverse().mean();
    case Kind::square:
      return arguments.max(0.0).sqrt().mean();
    case Kind::reciprocal:
      return all_positive ? arguments.inverse().mean() : kNaN;
    case Kind::reciprocal_sqrt:
      return all_positive ? arguments.square().inverse().mean() : kNaN;
    case Kind::reciprocal_square:
      return all_positive ? arguments.sqrt().inverse().mean() : kNaN;
    case Kind::power:
      if (!all_positive || std::abs(plain.parameters.front()) < kSmallestPower) return std::nullopt;
      return (arguments.log() / plain.parameters.front()).exp().mean();
    case Kind::box_cox:
      return box_cox_mean(plain.parameters.front(), residuals, eta, root, smallest);
    default:
      return std::nullopt;
  }
}

}  // namespace formsieve::backtransform

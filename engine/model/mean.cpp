#include "model/mean.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::model {

using forms::Kind;

namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

double power_of_base(Kind kind, double z) { return kind == Kind::log10 ? std::pow(10.0, z) : std::exp(z); }

}  // namespace

Mean::Mean(const forms::Form& response, const MeanRule& rule)
    : plain_(backtransform::plain_form(response)),
      kind_(backtransform::plain_kind(response)),
      back_(response),
      rule_(rule) {}

void Mean::of(std::span<const double> eta, std::span<const double> weights, std::span<const double> naive,
              MeanWorkspace& work, std::span<double> out) const {
  for (std::size_t i = 0; i < eta.size(); ++i) {
    const double root = weights.empty() ? 1.0 : 1.0 / std::sqrt(weights[i]);
    std::size_t part = 0;
    while (part < rule_.cuts.size() && eta[i] > rule_.cuts[part]) ++part;
    const double mean = one(rule_.parts[part], eta[i], root, naive[i], work);
    out[i] = std::isfinite(mean) ? mean : kNaN;
  }
}

double Mean::one(const MeanPart& part, double eta, double root, double naive, MeanWorkspace& work) const {
  if (part.factor) return *part.factor * naive;
  // exp(η) has been worked out already.
  if (root == 1.0 && kind_ == Kind::ln) return back_.offset + part.mean_exp * (naive - back_.offset);
  return back_(argument_mean(part, eta, root, work));
}

/// The mean of u = h(η + e·root), before reflection and shift.
double Mean::argument_mean(const MeanPart& part, double eta, double root, MeanWorkspace& work) const {
  switch (kind_) {
    case Kind::identity:
      return eta + part.first * root;
    case Kind::sqrt:
      if (eta + part.smallest * root >= 0.0) return eta * (eta + 2.0 * root * part.first) + root * root * part.second;
      return averaged_square(part, eta, root);
    case Kind::cube_root:
      return ((eta + 3.0 * part.first * root) * eta + 3.0 * part.second * root * root) * eta +
             part.third * root * root * root;
    case Kind::ln:
    case Kind::log10:
      if (root == 1.0) return power_of_base(kind_, eta) * part.mean_exp;
      break;
    case Kind::asinh:
      if (root == 1.0) return std::sinh(eta) * part.mean_cosh + std::cosh(eta) * part.mean_sinh;
      break;
    default:
      break;
  }
  return averaged(part, eta, root, work);
}

double Mean::averaged(const MeanPart& part, double eta, double root, MeanWorkspace& work) const {
  const std::size_t m = part.residuals.size();
  work.arguments.resize(m);
  work.values.resize(m);
  for (std::size_t j = 0; j < m; ++j) work.arguments[j] = eta + part.residuals[j] * root;
  forms::inverse_column(plain_, work.arguments, work.values);
  double total = 0.0;
  for (const double value : work.values) total += value;
  return total / static_cast<double>(m);
}

/// (1/m) Σ max(η + e·root, 0)²
double Mean::averaged_square(const MeanPart& part, double eta, double root) const {
  double total = 0.0;
  for (const double e : part.residuals) {
    const double argument = std::max(0.0, eta + e * root);
    total += argument * argument;
  }
  return total / static_cast<double>(part.residuals.size());
}

}  // namespace formsieve::model

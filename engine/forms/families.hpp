// The one-parameter families: powers, Box & Cox 1964, Yeo & Johnson 2000. Same members as the structs of functions.hpp.
#pragma once

#include "forms/functions.hpp"

namespace formsieve::forms {

/// Below this size of t = λ·ln w, (eᵗ − 1)/λ is ln w·(1 + t/2) to the last bit: the next term is t²/6 < 1e-17. Nothing
/// is then divided by λ, which may be as small as it likes.
inline constexpr double kTinyExponent = 1e-8;
/// Above this size of t, w^λ − 1 keeps all but a bit or two, and pow is more exact than exp(λ·ln w).
inline constexpr double kLargeExponent = 0.5;

struct Power : Shape {
  double p;
  explicit Power(double exponent) : Shape{shape_of(exponent)}, p{exponent} {}

  double value(double u) const {
    const bool defined = u > support.lower || (support.lower_closed && u == support.lower) || std::isnan(u);
    return defined ? std::pow(u, p) : kNaN;
  }
  double slope(double u) const { return p * std::pow(u, p - 1.0); }
  double log_slope(double u) const { return std::log(std::fabs(p)) + (p - 1.0) * std::log(std::fabs(u)); }
  double inverse(double z) const { return z < 0.0 ? -std::pow(-z, 1.0 / p) : std::pow(z, 1.0 / p); }

 private:
  static Shape shape_of(double p) {
    if (p == 0.0) return {kPositive, kPositive, kPositive, 0};
    if (p < 0.0) return {kPositive, kPositive, kPositive, -1};
    if (p != std::floor(p)) return {kNonNegative, kNonNegative, kNonNegative, 1};
    if (std::fmod(p, 2.0) == 0.0) return {kWholeLine, kNonNegative, kNonNegative, 1};
    return {kWholeLine, kWholeLine, kWholeLine, 1};
  }
};

/// (w^λ − 1)/λ from w and ln w, λ ≠ 0. `w_is_exact`: w carries no rounding that a power would magnify.
inline double scaled_power(double w, double ln_w, double lambda, bool w_is_exact) {
  const double t = lambda * ln_w;
  if (std::fabs(t) < kTinyExponent) return ln_w * (1.0 + 0.5 * t);
  if (w_is_exact && std::fabs(t) > kLargeExponent) return (std::pow(w, lambda) - 1.0) / lambda;
  return std::expm1(t) / lambda;
}

/// ln w from z = (w^λ − 1)/λ, λ ≠ 0, λz ≥ −1.
inline double log_of_scaled_power(double z, double lambda) {
  const double s = lambda * z;
  return std::fabs(s) < kTinyExponent ? z * (1.0 - 0.5 * s) : std::log1p(s) / lambda;
}

struct BoxCox : Shape {
  double lambda;
  explicit BoxCox(double l) : Shape{shape_of(l)}, lambda{l} {}

  double value(double u) const {
    if (u > 0.0) return lambda == 0.0 ? std::log(u) : scaled_power(u, std::log(u), lambda, true);
    return u == 0.0 && lambda > 0.0 ? -1.0 / lambda : kNaN;
  }
  double slope(double u) const { return std::pow(u, lambda - 1.0); }
  double log_slope(double u) const { return lambda == 1.0 ? 0.0 : (lambda - 1.0) * std::log(u); }
  double inverse(double z) const {
    if (lambda == 0.0) return std::exp(z);
    const double s = lambda * z;
    if (std::fabs(s) > kLargeExponent) return std::pow(1.0 + s, 1.0 / lambda);
    return std::exp(log_of_scaled_power(z, lambda));
  }

 private:
  static Shape shape_of(double l) {
    if (l == 0.0) return {kPositive, kPositive, kWholeLine, 1};
    if (l < 0.0) return {kPositive, kPositive, {-kInfinity, -1.0 / l, false, false}, 1};
    return {kNonNegative, kNonNegative, {-1.0 / l, kInfinity, true, false}, 1};
  }
};

struct YeoJohnson : Shape {
  double lambda;
  explicit YeoJohnson(double l) : Shape{kWholeLine, kWholeLine, image_of(l), 1}, lambda{l} {}

  double value(double u) const { return u >= 0.0 ? half(u, lambda) : -half(-u, 2.0 - lambda); }
  double slope(double u) const { return std::pow(1.0 + std::fabs(u), exponent(u)); }
  double log_slope(double u) const {
    const double e = exponent(u);
    return e == 0.0 ? 0.0 : e * std::log1p(std::fabs(u));
  }
  double inverse(double z) const { return z >= 0.0 ? half_inverse(z, lambda) : -half_inverse(-z, 2.0 - lambda); }

 private:
  double exponent(double u) const { return u >= 0.0 ? lambda - 1.0 : 1.0 - lambda; }

  /// Box-Cox of 1 + v, v ≥ 0. A power of 1 + v is as exact as its logarithm only where 1 + v has lost little of v.
  static double half(double v, double l) {
    const double ln_w = std::log1p(v);
    return l == 0.0 ? ln_w : scaled_power(1.0 + v, ln_w, l, v > 1.0);
  }
  static double half_inverse(double z, double l) {
    if (l == 0.0) return std::expm1(z);
    const double ln_w = log_of_scaled_power(z, l);
    if (ln_w > 1.0 && std::fabs(l * z) > kLargeExponent) return std::pow(1.0 + l * z, 1.0 / l) - 1.0;
    return std::expm1(ln_w);
  }
  static Interval image_of(double l) {
    const double upper = l < 0.0 ? -1.0 / l : kInfinity;
    const double lower = l > 2.0 ? 1.0 / (2.0 - l) : -kInfinity;
    return {lower, upper, false, false};
  }
};

}  // namespace formsieve::forms

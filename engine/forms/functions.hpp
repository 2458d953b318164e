// The plain functions of u that make up the one-column forms, one struct each. Every struct has
//
//   value(u)      f(u); NaN outside `support`
//   slope(u)      f′(u), u inside `support`
//   log_slope(u)  ln |f′(u)| without overflow, u inside `support`
//   inverse(z)    the u inside `branch` with f(u) = z, z inside `image`
//
// and a Shape: where it is defined, where it is one-to-one, what it takes there. Each loop over rows is compiled for
// one struct, so that nothing is decided per row.
#pragma once

#include <formsieve/forms.hpp>

#include <cmath>
#include <limits>
#include <numbers>

namespace formsieve::forms {

inline constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
inline constexpr double kInfinity = std::numeric_limits<double>::infinity();
inline constexpr double kLn2 = std::numbers::ln2;
inline constexpr double kLn3 = 1.0986122886681098;
inline constexpr double kLnLn10 = 0.83403244524795594;  // ln(ln 10)

inline constexpr Interval kWholeLine{-kInfinity, kInfinity, false, false};
inline constexpr Interval kNonNegative{0.0, kInfinity, true, false};
inline constexpr Interval kPositive{0.0, kInfinity, false, false};

/// Intervals of u and z, edges as in Interval.
struct Shape {
  Interval support;  ///< where f is defined
  Interval branch;   ///< the part of it that the inverse returns to
  Interval image;    ///< f(branch), an edge closed where the inverse is finite
  int sign;          ///< +1 rising, −1 falling on the branch, 0 when constant
};

struct Identity : Shape {
  Identity() : Shape{kWholeLine, kWholeLine, kWholeLine, 1} {}
  double value(double u) const { return u; }
  double slope(double) const { return 1.0; }
  double log_slope(double) const { return 0.0; }
  double inverse(double z) const { return z; }
};

struct Square : Shape {
  Square() : Shape{kWholeLine, kNonNegative, kNonNegative, 1} {}
  double value(double u) const { return u * u; }
  double slope(double u) const { return 2.0 * u; }
  double log_slope(double u) const { return kLn2 + std::log(std::fabs(u)); }
  double inverse(double z) const { return std::sqrt(z); }
};

struct Cube : Shape {
  Cube() : Shape{kWholeLine, kWholeLine, kWholeLine, 1} {}
  double value(double u) const { return u * u * u; }
  double slope(double u) const { return 3.0 * u * u; }
  double log_slope(double u) const { return kLn3 + 2.0 * std::log(std::fabs(u)); }
  double inverse(double z) const { return std::cbrt(z); }
};

struct Sqrt : Shape {
  Sqrt() : Shape{kNonNegative, kNonNegative, kNonNegative, 1} {}
  double value(double u) const { return u >= 0.0 ? std::sqrt(u) : kNaN; }
  double slope(double u) const { return 0.5 / std::sqrt(u); }
  double log_slope(double u) const { return -kLn2 - 0.5 * std::log(u); }
  double inverse(double z) const { return z * z; }
};

struct CubeRoot : Shape {
  CubeRoot() : Shape{kWholeLine, kWholeLine, kWholeLine, 1} {}
  double value(double u) const { return std::cbrt(u); }
  double slope(double u) const {
    const double root = std::cbrt(u);
    return 1.0 / (3.0 * root * root);
  }
  double log_slope(double u) const { return -kLn3 - 2.0 / 3.0 * std::log(std::fabs(u)); }
  double inverse(double z) const { return z * z * z; }
};

struct Ln : Shape {
  Ln() : Shape{kPositive, kPositive, kWholeLine, 1} {}
  double value(double u) const { return u > 0.0 ? std::log(u) : kNaN; }
  double slope(double u) const { return 1.0 / u; }
  double log_slope(double u) const { return -std::log(u); }
  double inverse(double z) const { return std::exp(z); }
};

struct Log10 : Shape {
  Log10() : Shape{kPositive, kPositive, kWholeLine, 1} {}
  double value(double u) const { return u > 0.0 ? std::log10(u) : kNaN; }
  double slope(double u) const { return std::numbers::log10e / u; }
  double log_slope(double u) const { return -kLnLn10 - std::log(u); }
  double inverse(double z) const { return std::pow(10.0, z); }
};

struct Reciprocal : Shape {
  Reciprocal() : Shape{kPositive, kPositive, kPositive, -1} {}
  double value(double u) const { return u > 0.0 ? 1.0 / u : kNaN; }
  double slope(double u) const { return -1.0 / u / u; }
  double log_slope(double u) const { return -2.0 * std::log(u); }
  double inverse(double z) const { return 1.0 / z; }
};

struct ReciprocalSqrt : Shape {
  ReciprocalSqrt() : Shape{kPositive, kPositive, kPositive, -1} {}
  double value(double u) const { return u > 0.0 ? 1.0 / std::sqrt(u) : kNaN; }
  double slope(double u) const { return -0.5 / std::sqrt(u) / u; }
  double log_slope(double u) const { return -kLn2 - 1.5 * std::log(u); }
  double inverse(double z) const { return 1.0 / z / z; }
};

struct ReciprocalSquare : Shape {
  ReciprocalSquare() : Shape{kPositive, kPositive, kPositive, -1} {}
  double value(double u) const { return u > 0.0 ? 1.0 / u / u : kNaN; }
  double slope(double u) const { return -2.0 / u / u / u; }
  double log_slope(double u) const { return kLn2 - 3.0 * std::log(u); }
  double inverse(double z) const { return 1.0 / std::sqrt(z); }
};

struct Exp : Shape {
  Exp() : Shape{kWholeLine, kWholeLine, kPositive, 1} {}
  double value(double u) const { return std::exp(u); }
  double slope(double u) const { return std::exp(u); }
  double log_slope(double u) const { return u; }
  double inverse(double z) const { return std::log(z); }
};

struct Asinh : Shape {
  Asinh() : Shape{kWholeLine, kWholeLine, kWholeLine, 1} {}
  double value(double u) const { return std::asinh(u); }
  double slope(double u) const { return 1.0 / std::hypot(1.0, u); }
  double log_slope(double u) const {
    return std::fabs(u) < 1.0 ? -0.5 * std::log1p(u * u) : -std::log(std::hypot(1.0, u));
  }
  double inverse(double z) const { return std::sinh(z); }
};

struct Logit : Shape {
  Logit() : Shape{{0.0, 1.0, false, false}, {0.0, 1.0, false, false}, kWholeLine, 1} {}
  double value(double u) const {
    if (!(u > 0.0 && u < 1.0)) return kNaN;
    // Between a quarter and three quarters ln u − ln(1 − u) would cancel, while 2u − 1 is exact.
    if (u >= 0.25 && u <= 0.75) return 2.0 * std::atanh(2.0 * u - 1.0);
    return std::log(u) - std::log1p(-u);
  }
  double slope(double u) const { return 1.0 / u / (1.0 - u); }
  double log_slope(double u) const { return -std::log(u) - std::log1p(-u); }
  double inverse(double z) const {
    const double e = std::exp(-std::fabs(z));
    return z >= 0.0 ? 1.0 / (1.0 + e) : e / (1.0 + e);
  }
};

struct ArcsineSqrt : Shape {
  ArcsineSqrt() : Shape{{0.0, 1.0, true, true}, {0.0, 1.0, true, true}, {0.0, std::numbers::pi / 2.0, true, true}, 1} {}
  double value(double u) const {
    if (!(u >= 0.0 && u <= 1.0)) return kNaN;
    return std::atan2(std::sqrt(u), std::sqrt(1.0 - u));  // keeps the digits of 1 − u that asin(√u) loses near 1
  }
  double slope(double u) const { return 0.5 / std::sqrt(u) / std::sqrt(1.0 - u); }
  double log_slope(double u) const { return -kLn2 - 0.5 * (std::log(u) + std::log1p(-u)); }
  double inverse(double z) const {
    const double s = std::sin(z);
    return s * s;
  }
};

}  // namespace formsieve::forms

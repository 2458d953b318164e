#include "backtransform/g_function.hpp"

#include <cmath>
#include <limits>

namespace formsieve::backtransform {

namespace {

/// Terms this far below the sum no longer change it.
constexpr double kNegligible = 1e-18;
/// The terms of z = 1e10 have vanished by then; a larger sum is no double.
constexpr int kMostTerms = 200000;

}  // namespace

double hypergeometric_0f1(double b, double z) {
  long double term = 1.0L, sum = 1.0L;
  for (int k = 0; k < kMostTerms; ++k) {
    term *= static_cast<long double>(z) / ((static_cast<long double>(b) + k) * (k + 1.0L));
    sum += term;
    if (!std::isfinite(sum) || std::fabs(term) <= kNegligible * std::fabs(sum)) break;
  }
  return static_cast<double>(sum);
}

double unbiased_factor(double df, double sigma, double leverage, double weight) {
  constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
  if (!(df > 0.0)) return kNaN;
  const double g = hypergeometric_0f1(0.5 * df, 0.25 * df * (1.0 / weight - leverage) * sigma * sigma);
  return g > 0.0 ? g : kNaN;
}

}  // namespace formsieve::backtransform

// The g-function against Boost's ₀F₁ and 50 digits, Finney's own series, and its unbiasedness by simulation.
#include "backtransform/corrections.hpp"
#include "backtransform/g_function.hpp"

#include <boost/math/special_functions/hypergeometric_0F1.hpp>
#include <boost/multiprecision/cpp_bin_float.hpp>
#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <random>

namespace {

using namespace formsieve;
using backtransform::hypergeometric_0f1;
using backtransform::unbiased_factor;
using Digits = boost::multiprecision::cpp_bin_float_50;

Digits series_50_digits(double b, double z) {
  Digits term = 1, sum = 1;
  for (int k = 0; k < 20000 && abs(term) > Digits(1e-45) * abs(sum); ++k) {
    term *= Digits(z) / ((Digits(b) + k) * (k + 1));
    sum += term;
  }
  return sum;
}

/// Finney 1941 as written by Bradu & Mundlak 1970 (from memory): g_m(t) = Σ_p m^p (m + 2p)/(m(m + 2)…(m + 2p)) ·
/// (m/(m + 1))^p · t^p/p!.
double finney(double m, double t) {
  long double sum = 0.0L, product = 1.0L, factorial = 1.0L;
  for (int p = 0; p < 200; ++p) {
    product *= m + 2.0L * p;
    if (p > 0) factorial *= p;
    const long double term = std::pow(static_cast<long double>(m), p) * (m + 2.0L * p) / product *
                             std::pow(m / (m + 1.0L), static_cast<long double>(p)) *
                             std::pow(static_cast<long double>(t), p) / factorial;
    if (!std::isfinite(term) || !std::isfinite(product)) break;
    sum += term;
  }
  return static_cast<double>(sum);
}

}  // namespace

TEST_CASE("backtransform: the g-function's series agrees with Boost and with 50 digits", "[backtransform][reference]") {
  for (const double b : {0.5, 1.0, 3.5, 14.0, 250.0, 5e5})
    for (const double z : {0.0, 1e-8, 0.01, 0.7, 5.0, 40.0, 300.0}) {
      INFO("b " << b << " z " << z);
      CHECK(hypergeometric_0f1(b, z) == Approx(static_cast<double>(series_50_digits(b, z))).epsilon(2e-16));
      CHECK(hypergeometric_0f1(b, z) == Approx(boost::math::hypergeometric_0F1(b, z)).epsilon(1e-12));
    }
  for (const double b : {0.5, 3.5, 14.0})
    for (const double z : {-0.01, -0.7, -3.0})
      CHECK(hypergeometric_0f1(b, z) ==
            Approx(static_cast<double>(series_50_digits(b, z))).epsilon(1e-15).margin(1e-15));
  CHECK(hypergeometric_0f1(10.0, 1e12) == std::numeric_limits<double>::infinity());
}

TEST_CASE("backtransform: Finney's series is the same function", "[backtransform][unit]") {
  for (const double m : {3.0, 8.0, 28.0})
    for (const double t : {0.05, 0.4, 2.0})
      CHECK(hypergeometric_0f1(m / 2.0, m * m * t / (2.0 * (m + 1.0))) == Approx(finney(m, t)).epsilon(1e-14));
}

TEST_CASE("backtransform: the unbiased factor tends to exp(s²/2) with the rows", "[backtransform][unit]") {
  CHECK(unbiased_factor(1e9, 0.5, 0.0, 1.0) == Approx(std::exp(0.125)).epsilon(1e-8));
  CHECK(unbiased_factor(20.0, 0.5, 1.0, 1.0) == 1.0);  // the prediction's own variance has done it already
  CHECK(unbiased_factor(20.0, 0.5, 0.1, 1.0) < std::exp(0.125));
  CHECK(unbiased_factor(20.0, 0.5, 0.1, 4.0) < unbiased_factor(20.0, 0.5, 0.1, 1.0));
  CHECK(std::isnan(unbiased_factor(0.0, 0.5, 0.1, 1.0)));
  CHECK(std::isnan(unbiased_factor(3.0, 2.0, 2.7, 1.0)));  // far beyond the rows the series turns negative
}

TEST_CASE("backtransform: exp(η̂)·g is unbiased for the lognormal mean", "[backtransform][property]") {
  // m = 6 degrees of freedom, h = 0.3, σ = 0.8: η̂ ~ N(0, hσ²) and s² ~ σ²χ²_m/m are all that the estimate is made of.
  std::mt19937_64 generator(11);
  std::normal_distribution<double> normal;
  std::chi_squared_distribution<double> chi_squared(6.0);
  const double sigma = 0.8, leverage = 0.3;
  for (const double weight : {1.0, 2.5}) {
    const int draws = 400000;
    double total = 0.0, squares = 0.0;
    for (int i = 0; i < draws; ++i) {
      const double eta = std::sqrt(leverage) * sigma * normal(generator);
      const double s = sigma * std::sqrt(chi_squared(generator) / 6.0);
      const double estimate = std::exp(eta) * unbiased_factor(6.0, s, leverage, weight);
      total += estimate;
      squares += estimate * estimate;
    }
    const double mean = total / draws, error = std::sqrt((squares / draws - mean * mean) / draws);
    const double truth = std::exp(sigma * sigma / (2.0 * weight));
    INFO("mean " << mean << " ± " << error << ", truth " << truth);
    CHECK(std::abs(mean - truth) < 4.0 * error);
    CHECK(error < 0.002 * truth);
  }
}

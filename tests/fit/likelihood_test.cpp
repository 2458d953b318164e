#include "fit/least_squares.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>

using namespace formsieve;

namespace {
constexpr double kInfinity = std::numeric_limits<double>::infinity();
}

TEST_CASE("fit: own-scale likelihood is the normal density of ln y carried to y", "[fit][unit]") {
  // ln y = 1, 2, 4 about their mean with variances σ²/w, and the density of y by change of variable, row by row.
  const double z[] = {1.0, 2.0, 4.0};
  const double w[] = {1.0, 2.0, 0.5};
  double sum_w = 0.0, mean = 0.0, rss = 0.0, log_jacobian = 0.0, half_log_weights = 0.0, direct = 0.0;
  for (int i = 0; i < 3; ++i) sum_w += w[i];
  for (int i = 0; i < 3; ++i) mean += w[i] * z[i] / sum_w;
  for (int i = 0; i < 3; ++i) rss += w[i] * (z[i] - mean) * (z[i] - mean);
  for (int i = 0; i < 3; ++i) {
    const double variance = rss / 3.0 / w[i];
    const double y = std::exp(z[i]);
    direct += std::log(std::exp(-0.5 * (z[i] - mean) * (z[i] - mean) / variance) /
                       (std::sqrt(2.0 * std::numbers::pi * variance) * y));
    log_jacobian -= std::log(y);
    half_log_weights += 0.5 * std::log(w[i]);
  }
  const auto likelihood = fit::own_scale_likelihood(rss, 3, 1, log_jacobian, half_log_weights);
  CHECK(likelihood.log_likelihood == Approx(direct).epsilon(1e-14));
  CHECK(likelihood.n_parameters == 2);
  CHECK(likelihood.aic == Approx(-2.0 * direct + 4.0).epsilon(1e-14));
  CHECK(likelihood.bic == Approx(-2.0 * direct + 2.0 * std::log(3.0)).epsilon(1e-14));
  CHECK(likelihood.aicc == kInfinity);  // n = q + 1
}

TEST_CASE("fit: penalties follow their definitions", "[fit][unit]") {
  CHECK(fit::aic_penalty(4) == 10.0);
  CHECK(fit::bic_penalty(4, 100) == Approx(5.0 * std::log(100.0)).epsilon(1e-15));
  CHECK(fit::aicc_penalty(4, 100) == Approx(10.0 + 60.0 / 94.0).epsilon(1e-15));
  CHECK(fit::aicc_penalty(4, 7) == Approx(10.0 + 60.0).epsilon(1e-15));
  CHECK(fit::aicc_penalty(4, 6) == kInfinity);
  CHECK(fit::aicc_penalty(4, 3) == kInfinity);
}

TEST_CASE("fit: an exact fit and an infinite Jacobian give no NaN", "[fit][unit]") {
  const auto exact = fit::own_scale_likelihood(0.0, 20, 3, -1.5, 0.0);
  CHECK(exact.log_likelihood == kInfinity);
  CHECK(exact.aic == -kInfinity);
  CHECK(exact.aicc == -kInfinity);
  CHECK(exact.bic == -kInfinity);
  const auto saturated = fit::own_scale_likelihood(0.0, 4, 4, 0.0, 0.0);
  CHECK(saturated.aic == -kInfinity);
  CHECK(saturated.aicc == kInfinity);
  for (const double jacobian : {kInfinity, -kInfinity}) {  // √y or y² at y = 0: not comparable, so last
    const auto none = fit::own_scale_likelihood(2.0, 20, 3, jacobian, 0.0);
    CHECK(none.log_likelihood == -kInfinity);
    CHECK(none.aic == kInfinity);
    CHECK(none.aicc == kInfinity);
    CHECK(none.bic == kInfinity);
  }
}

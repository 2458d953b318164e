#include "survey/box_cox.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <random>
#include <vector>

#include "reference.hpp"

namespace formsieve::survey {
namespace {

std::vector<double> sorted(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  return values;
}

/// The log-likelihood of Box & Cox 1964 as written there, Jacobian and all.
double plain_likelihood(const std::vector<double>& x, double lambda) {
  const double n = static_cast<double>(x.size());
  double mean = 0.0;
  double logs = 0.0;
  const auto z = [&](double value) {
    return lambda == 0.0 ? std::log(value) : (std::pow(value, lambda) - 1.0) / lambda;
  };
  for (const double value : x) {
    mean += z(value) / n;
    logs += std::log(value);
  }
  double variance = 0.0;
  for (const double value : x) variance += (z(value) - mean) * (z(value) - mean) / n;
  return -0.5 * n * std::log(variance) + (lambda - 1.0) * logs;
}

TEST_CASE("survey: Box–Cox power equals that of SciPy, cut at 3", "[survey][reference]") {
  std::size_t n_compared = 0;
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    if (!column.contains("box_cox_lambda")) continue;
    INFO(name);
    const double expected = std::clamp(column.at("box_cox_lambda").get<double>(), -3.0, 3.0);
    const auto found = box_cox_lambda(sorted(testing::values_of(column)));
    REQUIRE(found);
    CHECK(*found == Approx(expected).epsilon(0).margin(1e-6));
    ++n_compared;
  }
  CHECK(n_compared >= 8);
}

TEST_CASE("survey: Box–Cox likelihood differs from the published formula by a constant only", "[survey][property]") {
  const std::vector<double> x = {0.4, 0.9, 1.3, 2.0, 2.2, 5.1, 9.0};
  const BoxCoxLikelihood likelihood(x);
  // The two agree at λ = 1 up to the same constant: the published one without Σ ln x, ours with ln g taken out.
  const double constant = likelihood(1.0) - plain_likelihood(x, 1.0);
  for (const double lambda : {-3.0, -1.0, -0.01, 0.0, 1e-9, 0.3, 2.0, 3.0}) {
    INFO("λ = " << lambda);
    CHECK(likelihood(lambda) - plain_likelihood(x, lambda) == Approx(constant).epsilon(0).margin(1e-6));
  }
}

TEST_CASE("survey: Box–Cox power does not change with the unit", "[survey][property]") {
  std::mt19937_64 engine(31);
  std::lognormal_distribution<double> draw(0.0, 0.5);
  std::vector<double> x(80);
  for (double& value : x) value = draw(engine);
  const auto plain = box_cox_lambda(sorted(x));
  for (const int exponent : {-990, 990}) {
    std::vector<double> scaled;
    for (const double value : x) scaled.push_back(std::ldexp(value, exponent));
    CHECK(*box_cox_lambda(sorted(scaled)) == Approx(*plain).epsilon(0).margin(1e-6));
  }
}

TEST_CASE("survey: Box–Cox power of a column that is normal after a known power is close to it", "[survey][property]") {
  std::mt19937_64 engine(32);
  std::normal_distribution<double> draw(10.0, 1.0);
  for (const double power : {-1.0, 0.0, 0.5, 2.0}) {
    std::vector<double> x(4000);
    for (double& value : x) {
      const double z = draw(engine);
      value = power == 0.0 ? std::exp(z) : std::pow(z, 1.0 / power);
    }
    INFO("power " << power);
    const double found = *box_cox_lambda(sorted(x));
    const BoxCoxLikelihood likelihood(x);
    const double h = 0.05;
    const double curvature = (likelihood(found + h) - 2.0 * likelihood(found) + likelihood(found - h)) / (h * h);
    const double standard_error = 1.0 / std::sqrt(-curvature);
    CHECK(standard_error < 0.3);
    CHECK(std::abs(found - power) < 3.0 * standard_error);
  }
}

TEST_CASE("survey: Box–Cox likelihood is finite for values 600 orders of magnitude apart", "[survey][unit]") {
  const std::vector<double> x = {1e-300, 1e-200, 1.0, 3.0, 1e250, 1e300};
  const BoxCoxLikelihood likelihood(x);
  for (const double lambda : {-3.0, -0.5, 0.0, 0.5, 3.0}) CHECK(std::isfinite(likelihood(lambda)));
  CHECK(std::abs(*box_cox_lambda(x)) < 0.05);
}

TEST_CASE("survey: Box–Cox power is unset for fewer than three distinct values and at the end beyond it",
          "[survey][unit]") {
  CHECK_FALSE(box_cox_lambda({}));
  CHECK_FALSE(box_cox_lambda(std::vector<double>{2.0, 2.0, 2.0}));
  CHECK_FALSE(box_cox_lambda(std::vector<double>{2.0, 2.0, 5.0}));
  std::vector<double> left_tail;
  std::vector<double> right_tail;
  for (const double d : {0.1, 0.2, 0.3, 0.5, 1.0, 2.0, 9.0}) {
    left_tail.push_back(100.0 - d);
    right_tail.push_back(100.0 + d);
  }
  CHECK(*box_cox_lambda(sorted(left_tail)) == kHighestLambda);
  CHECK(*box_cox_lambda(sorted(right_tail)) == kLowestLambda);
}

}  // namespace
}  // namespace formsieve::survey

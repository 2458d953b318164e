#include "survey/resolution.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <random>
#include <vector>

namespace formsieve::survey {
namespace {

double of(const std::vector<double>& values) { return resolution(values); }

TEST_CASE("survey: resolution is the largest power of ten that measures every value", "[survey][unit]") {
  CHECK(of({3.0, -20.0, 1000.0, 0.0}) == 1.0);
  CHECK(of({100.0, 200.0}) == 1.0);
  CHECK(of({0.5, 1.0}) == 0.1);
  CHECK(of({12.34, 7.0, -0.01}) == 0.01);
  CHECK(of({1.005}) == 0.001);
  CHECK(of({0.000125}) == 1e-6);
  CHECK(of({1e-15}) == 1e-15);
}

TEST_CASE("survey: resolution forgives the rounding of a few additions", "[survey][unit]") {
  CHECK(of({0.1 + 0.2}) == 0.1);
  CHECK(of({1.1 * 3.0, 2.0}) == 0.1);
  CHECK(of({0.1 * 3.0 * 10.0}) == 1.0);
  CHECK(of({4.35 * 100.0}) == 1.0);
}

TEST_CASE("survey: resolution is 0 when more than 15 decimals are needed", "[survey][unit]") {
  CHECK(of({}) == 0.0);
  CHECK(of({1.0 / 3.0 * 1e-3, 0.1}) == 0.0);
  CHECK(of({1e-300}) == 0.0);
}

TEST_CASE("survey: resolution takes numbers beyond 2^53 as whole and does not call other large numbers so",
          "[survey][unit]") {
  CHECK(of({1e300, 9007199254740993.0}) == 1.0);
  CHECK(of({1e300, 0.25}) == 0.01);
  CHECK(of({123456789.25}) == 0.01);
  CHECK(of({1e14 + 0.5}) == 0.1);
}

TEST_CASE("survey: resolution finds the decimals of random decimal fractions in any order", "[survey][property]") {
  std::mt19937_64 engine(21);
  std::uniform_int_distribution<long long> draw(-99'999'999, 99'999'999);
  for (int decimals = 0; decimals <= 9; ++decimals) {
    const double power = std::pow(10.0, decimals);
    std::vector<double> values(200);
    for (double& value : values) value = static_cast<double>(draw(engine)) / power;
    values.push_back(1.0 / power);  // so that no coarser power will do
    INFO(decimals << " decimals");
    CHECK(resolution(values) == 1.0 / power);
    values.push_back(0.1 + 0.2);
    const double forward = resolution(values);
    std::reverse(values.begin(), values.end());
    CHECK(resolution(values) == forward);
    CHECK(forward == std::min(1.0 / power, 0.1));
  }
}

}  // namespace
}  // namespace formsieve::survey

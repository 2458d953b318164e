#include "survey/medcouple.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include "reference.hpp"

namespace formsieve::survey {
namespace {

double middle(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  const std::size_t n = values.size();
  return n % 2 == 1 ? values[n / 2] : (values[n / 2 - 1] + values[n / 2]) / 2.0;
}

/// The definition of Brys, Hubert & Struyf 2004 over all pairs, as a plain double loop.
double plain_medcouple(const std::vector<double>& values) {
  const double m = middle(values);
  const auto n_ties = std::count(values.begin(), values.end(), m);
  std::vector<double> kernels;
  std::ptrdiff_t tie_above = 0;
  for (const double x : values) {
    if (x < m) continue;
    tie_above += x == m ? 1 : 0;
    std::ptrdiff_t tie_below = 0;
    for (const double y : values) {
      if (y > m) continue;
      tie_below += y == m ? 1 : 0;
      if (x == m && y == m) {
        const std::ptrdiff_t place = tie_above + tie_below - 1;  // i + j − 1 against k, i and j counted from 1
        kernels.push_back(place < n_ties ? -1.0 : place == n_ties ? 0.0 : 1.0);
      } else {
        kernels.push_back(((x - m) - (m - y)) / (x - y));
      }
    }
  }
  return middle(kernels);
}

double medcouple_of(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  return medcouple(values);
}

TEST_CASE("survey: medcouple equals that of statsmodels", "[survey][reference]") {
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    INFO(name);
    CHECK(medcouple_of(testing::values_of(column)) ==
          Approx(column.at("medcouple").get<double>()).epsilon(0).margin(1e-10));
  }
}

TEST_CASE("survey: medcouple equals the plain loop over all pairs of continuous values", "[survey][property]") {
  std::mt19937_64 engine(11);
  std::lognormal_distribution<double> draw(0.0, 1.0);
  for (std::size_t n = 1; n <= 120; ++n) {
    std::vector<double> x(n);
    for (double& value : x) value = draw(engine);
    INFO("n = " << n);
    CHECK(medcouple_of(x) == Approx(plain_medcouple(x)).epsilon(0).margin(1e-14));
  }
}

TEST_CASE("survey: medcouple equals the plain loop when many values are tied with the median", "[survey][property]") {
  std::mt19937_64 engine(12);
  for (const double rate : {0.3, 1.0, 3.0}) {
    std::poisson_distribution<int> draw(rate);
    for (std::size_t n = 1; n <= 90; ++n) {
      std::vector<double> x(n);
      for (double& value : x) value = draw(engine);
      INFO("rate " << rate << ", n = " << n);
      CHECK(medcouple_of(x) == Approx(plain_medcouple(x)).epsilon(0).margin(1e-14));
    }
  }
}

TEST_CASE("survey: medcouple equals the plain loop when more pairs are left than are listed at once",
          "[survey][property]") {
  std::mt19937_64 engine(13);
  std::gamma_distribution<double> draw(2.0, 1.0);
  for (const std::size_t n : {1000U, 2001U}) {
    std::vector<double> fine(n);
    std::vector<double> coarse(n);
    for (std::size_t i = 0; i < n; ++i) {
      fine[i] = draw(engine);
      coarse[i] = std::floor(4.0 * fine[i]);
    }
    CHECK(medcouple_of(fine) == Approx(plain_medcouple(fine)).epsilon(0).margin(1e-14));
    CHECK(medcouple_of(coarse) == Approx(plain_medcouple(coarse)).epsilon(0).margin(1e-14));
  }
}

TEST_CASE("survey: medcouple changes sign when the values do, and not with their unit or origin",
          "[survey][property]") {
  std::mt19937_64 engine(14);
  std::gamma_distribution<double> draw(1.5, 1.0);
  std::vector<double> x(2000);
  for (double& value : x) value = std::round(draw(engine) * 1024.0) / 1024.0;
  const double plain = medcouple_of(x);
  std::vector<double> negated;
  std::vector<double> moved;
  std::vector<double> tiny;
  for (const double value : x) {
    negated.push_back(-value);
    moved.push_back(4.0 * value + 512.0);
    tiny.push_back(std::ldexp(value, -1000));
  }
  CHECK(plain > 0.2);
  CHECK(medcouple_of(negated) == Approx(-plain).epsilon(0).margin(1e-15));
  CHECK(medcouple_of(moved) == plain);
  CHECK(medcouple_of(tiny) == plain);
}

TEST_CASE("survey: medcouple of extreme, equal or few values is a number between −1 and 1", "[survey][unit]") {
  const double largest = std::numeric_limits<double>::max();
  CHECK(medcouple_of({}) == 0.0);
  CHECK(medcouple_of({3.0}) == 0.0);
  CHECK(medcouple_of({3.0, 8.0}) == 0.0);
  CHECK(medcouple_of(std::vector<double>(101, 0.1)) == 0.0);
  CHECK(medcouple_of({-largest, 0.0, largest}) == 0.0);
  CHECK(medcouple_of({-largest, largest}) == 0.0);
  CHECK(medcouple_of({0.0, 1e-300, 1e300}) == plain_medcouple({0.0, 1e-300, 1e300}));
  // Half of the values are 5e-324, the smallest double, apart.
  CHECK(std::abs(medcouple_of({0.0, 5e-324, 1e-323, 1.0, 1e300})) <= 1.0);
}

TEST_CASE("survey: medcouple of 200,000 values equals its negative counterpart within a second or so",
          "[survey][property]") {
  std::mt19937_64 engine(15);
  std::exponential_distribution<double> draw(1.0);
  std::vector<double> x(200'000);
  for (double& value : x) value = draw(engine);
  std::vector<double> negated;
  for (const double value : x) negated.push_back(-value);
  const double found = medcouple_of(x);
  CHECK(found == Approx(-medcouple_of(negated)).epsilon(0).margin(1e-15));
  // 2·10^10 pairs: the plain loop would take minutes. A sample of 2,001 values is close to the whole.
  x.resize(2001);
  CHECK(found == Approx(plain_medcouple(x)).epsilon(0).margin(0.05));
}

}  // namespace
}  // namespace formsieve::survey

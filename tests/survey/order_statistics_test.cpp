#include "survey/order_statistics.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <limits>
#include <vector>

#include "reference.hpp"

namespace formsieve::survey {
namespace {

std::vector<double> sorted(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  return values;
}

TEST_CASE("survey: quartiles equal NumPy's linear ones", "[survey][reference]") {
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    INFO(name);
    const auto x = sorted(testing::values_of(column));
    const auto expected = column.at("quartiles").get<std::vector<double>>();
    CHECK(quantile(x, 0.25) == Approx(expected[0]).epsilon(1e-14));
    CHECK(quantile(x, 0.5) == Approx(expected[1]).epsilon(1e-14));
    CHECK(quantile(x, 0.75) == Approx(expected[2]).epsilon(1e-14));
  }
}

TEST_CASE("survey: quantile interpolates between neighbours and reaches both ends", "[survey][unit]") {
  const std::vector<double> x = {1.0, 2.0, 4.0, 8.0};  // type 7: place 1 + 3p
  CHECK(quantile(x, 0.0) == 1.0);
  CHECK(quantile(x, 0.25) == Approx(1.75));
  CHECK(quantile(x, 0.5) == 3.0);
  CHECK(quantile(x, 1.0) == 8.0);
  CHECK(quantile(std::vector<double>{7.0}, 0.75) == 7.0);
  const double largest = std::numeric_limits<double>::max();
  CHECK(quantile(std::vector<double>{-largest, largest}, 0.5) == 0.0);
}

TEST_CASE("survey: distinct values are counted with one zero", "[survey][unit]") {
  CHECK(count_distinct({}) == 0);
  CHECK(count_distinct(std::vector<double>{-1.0, -0.0, 0.0, 2.0, 2.0}) == 3);
}

TEST_CASE("survey: outlying values are those beyond 3.5 scaled absolute deviations", "[survey][unit]") {
  // Median 3, absolute deviations 2 1 1 0 0 1 1 97 → MAD 1; the limit is 3 ± 3.5/0.6745 = 3 ± 5.189.
  CHECK(count_outlying(sorted({1, 2, 2, 3, 3, 4, 4, 100})).n == 1);
  CHECK(count_outlying(sorted({1, 2, 2, 3, 3, 4, 4, 8.18})).n == 0);
  CHECK(count_outlying(sorted({1, 2, 2, 3, 3, 4, 4, 8.19})).n == 1);
  CHECK(count_outlying(sorted({-50, 2, 2, 3, 3, 4, 4, 100})).n == 2);
}

TEST_CASE("survey: outlying values are judged by the mean deviation when the median one is zero", "[survey][unit]") {
  // 18 zeros, 1 and 30: mean deviation 31/20 = 1.55; the limit is 3.5·1.253314·1.55 = 6.80.
  std::vector<double> x(18, 0.0);
  x.push_back(1.0);
  x.push_back(30.0);
  const Outlying found = count_outlying(x);
  CHECK(found.by_mean_deviation);
  CHECK(found.n == 1);
  x.back() = 5.0;  // mean deviation 0.3, limit 1.32
  CHECK(count_outlying(x).n == 1);
  x[17] = 1.0;
  x.back() = 1.5;  // mean deviation 0.175, limit 0.77: all three non-zeros are beyond
  CHECK(count_outlying(x).n == 3);
}

TEST_CASE("survey: a column of two values has none outlying", "[survey][unit]") {
  std::vector<double> x(99, 0.0);
  x.push_back(1.0);
  CHECK(count_outlying(x).n == 0);
  CHECK_FALSE(count_outlying(x).by_mean_deviation);
  CHECK(count_outlying({}).n == 0);
}

TEST_CASE("survey: outlying values are found at the ends of the number range", "[survey][unit]") {
  const double largest = std::numeric_limits<double>::max();
  CHECK(count_outlying(sorted({-largest, -1.0, 0.0, 1.0, 2.0, largest})).n == 2);
  CHECK(count_outlying(sorted({1e-300, 2e-300, 3e-300, 4e-300, 1e300})).n == 1);
  CHECK(count_outlying(sorted({0.5 * largest, 0.6 * largest, 0.7 * largest, -largest})).n == 1);
}

}  // namespace
}  // namespace formsieve::survey

#include "survey/moments.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>
#include <limits>
#include <random>
#include <vector>

#include "reference.hpp"

namespace formsieve::survey {
namespace {

using testing::read_json;
using testing::values_of;

/// The formulas of Joanes & Gill 1998 as a plain loop in long double.
Moments plain_moments(const std::vector<double>& x) {
  const auto n = static_cast<long double>(x.size());
  long double mean = 0;
  for (const double value : x) mean += value / n;
  long double m2 = 0;
  long double m3 = 0;
  long double m4 = 0;
  for (const double value : x) {
    const long double d = value - mean;
    m2 += d * d / n;
    m3 += d * d * d / n;
    m4 += d * d * d * d / n;
  }
  Moments out;
  out.mean = static_cast<double>(mean);
  out.sd = static_cast<double>(std::sqrt(m2 * n / (n - 1)));
  out.skewness = static_cast<double>(std::sqrt(n * (n - 1)) / (n - 2) * m3 / std::pow(m2, 1.5L));
  out.excess_kurtosis = static_cast<double>((n - 1) / ((n - 2) * (n - 3)) * ((n + 1) * (m4 / (m2 * m2) - 3) + 6));
  return out;
}

TEST_CASE("survey: moments equal the figures of the worked cases for every column and response",
          "[survey][reference]") {
  // tests/reference/cases: NumPy 1.24.2 and SciPy 1.10.1, as named in each file.
  std::size_t n_compared = 0;
  for (const auto& entry :
       std::filesystem::directory_iterator(std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/cases")) {
    if (entry.path().extension() != ".json") continue;
    const auto content = read_json("cases/" + entry.path().filename().string());
    const auto& data = content.at("input").at("data");
    auto described = content.at("output").at("describe").at("columns");
    described[content.at("input").at("response").get<std::string>()] =
        content.at("output").at("describe").at("response");
    for (const auto& [name, expected] : described.items()) {
      INFO(entry.path().filename().string() << ", column " << name);
      const Moments found = moments(data.at(name).get<std::vector<double>>());
      CHECK(found.n == expected.at("n").get<std::size_t>());
      CHECK(found.mean == Approx(expected.at("mean").get<double>()).epsilon(1e-12).margin(1e-13));
      CHECK(found.sd == Approx(expected.at("sd").get<double>()).epsilon(1e-10));
      CHECK(found.skewness == Approx(expected.at("skew_G1").get<double>()).epsilon(1e-9).margin(1e-10));
      CHECK(found.excess_kurtosis == Approx(expected.at("kurt_G2").get<double>()).epsilon(1e-9).margin(1e-10));
      ++n_compared;
    }
  }
  CHECK(n_compared > 60);
}

TEST_CASE("survey: moments equal NumPy's and SciPy's", "[survey][reference]") {
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    INFO(name);
    const Moments found = moments(values_of(column));
    CHECK(found.mean == Approx(column.at("mean").get<double>()).epsilon(1e-13));
    CHECK(found.sd == Approx(column.at("sd").get<double>()).epsilon(1e-11));
    CHECK(found.skewness == Approx(column.at("skewness_G1").get<double>()).epsilon(1e-9));
    CHECK(found.excess_kurtosis == Approx(column.at("excess_kurtosis_G2").get<double>()).epsilon(1e-9));
  }
}

TEST_CASE("survey: moments equal a plain long double loop over several chunks", "[survey][unit]") {
  std::mt19937_64 engine(7);
  std::lognormal_distribution<double> draw(0.0, 0.7);
  for (const std::size_t n : {5U, 1023U, 1024U, 1025U, 4099U}) {
    std::vector<double> x(n);
    for (double& value : x) value = 1000.0 + draw(engine);
    const Moments expected = plain_moments(x);
    const Moments found = moments(x);
    CHECK(found.mean == Approx(expected.mean).epsilon(1e-15));
    CHECK(found.sd == Approx(expected.sd).epsilon(1e-12));
    CHECK(found.skewness == Approx(expected.skewness).epsilon(1e-11));
    CHECK(found.excess_kurtosis == Approx(expected.excess_kurtosis).epsilon(1e-11));
  }
}

TEST_CASE("survey: moments do not change when the unit does, from the smallest to the largest numbers",
          "[survey][property]") {
  const std::vector<double> x = {1.0, 1.5, 2.25, 4.0, 4.5, 17.0};
  const Moments plain = moments(x);
  for (const int exponent : {-1060, -1000, -500, 3, 900, 1018}) {
    INFO("unit 2^" << exponent);
    std::vector<double> scaled;
    for (const double value : x) scaled.push_back(std::ldexp(value, exponent));
    const Moments found = moments(scaled);
    CHECK(found.mean == Approx(std::ldexp(plain.mean, exponent)).epsilon(1e-4));  // subnormal results keep few digits
    CHECK(found.sd == Approx(std::ldexp(plain.sd, exponent)).epsilon(1e-4));
    CHECK(found.skewness == Approx(plain.skewness).epsilon(1e-14));
    CHECK(found.excess_kurtosis == Approx(plain.excess_kurtosis).epsilon(1e-13));
  }
}

TEST_CASE("survey: moments of values 600 orders of magnitude apart are finite", "[survey][unit]") {
  const Moments found = moments(std::vector<double>{1e-300, 1.0, 1e300, 1e-300});
  // One value that dwarfs three others: G1 = 2 and G2 = 4 exactly, as for 0, 0, 0, 1.
  CHECK(found.skewness == Approx(2.0).epsilon(1e-14));
  CHECK(found.excess_kurtosis == Approx(4.0).epsilon(1e-13));
  CHECK(found.mean == Approx(2.5e299).epsilon(1e-15));
  CHECK(found.sd == Approx(5e299).epsilon(1e-14));
  const double largest = std::numeric_limits<double>::max();
  const Moments both_ends = moments(std::vector<double>{-largest, 0.0, largest});
  CHECK(both_ends.mean == 0.0);
  CHECK(both_ends.skewness == 0.0);
}

TEST_CASE("survey: moments see a difference of one unit in the last place", "[survey][unit]") {
  const double eps = std::numeric_limits<double>::epsilon();
  const Moments found = moments(std::vector<double>{1.0, 1.0, 1.0, 1.0 + eps});
  CHECK(found.skewness == Approx(2.0).epsilon(1e-12));
  CHECK(found.sd == Approx(eps / 2.0).epsilon(1e-12));
}

TEST_CASE("survey: moments of equal or too few values are zero where undefined", "[survey][unit]") {
  const Moments equal = moments(std::vector<double>(1000, 0.1));
  CHECK(equal.mean == 0.1);
  CHECK(equal.sd == 0.0);
  CHECK(equal.skewness == 0.0);
  CHECK(equal.excess_kurtosis == 0.0);
  CHECK(moments({}).n == 0);
  const Moments two = moments(std::vector<double>{1.0, 4.0});
  CHECK(two.sd == Approx(std::sqrt(4.5)));
  CHECK(two.skewness == 0.0);
  const Moments three = moments(std::vector<double>{0.0, 0.0, 1.0});
  CHECK(three.skewness == Approx(std::sqrt(3.0)).epsilon(1e-14));  // G1 of 0, 0, 1 by hand: (1/√2)·√6/1
  CHECK(three.excess_kurtosis == 0.0);
}

}  // namespace
}  // namespace formsieve::survey

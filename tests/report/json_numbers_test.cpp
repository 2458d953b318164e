// Numbers of shortlist.json, read with std::from_chars: a reader that is not the one that wrote them.
#include "made_shortlist.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>

#include <bit>
#include <charconv>
#include <cmath>
#include <limits>
#include <random>
#include <string>
#include <vector>

using namespace formsieve;

namespace {

/// The values of all `"value": …` keys in the order of the file; NaN for null.
std::vector<double> values_in(const std::string& text) {
  const std::string key = "\"value\": ";
  std::vector<double> out;
  for (std::size_t at = text.find(key); at != std::string::npos; at = text.find(key, at + 1)) {
    double value = std::numeric_limits<double>::quiet_NaN();
    const char* begin = text.data() + at + key.size();
    if (*begin != 'n') std::from_chars(begin, text.data() + text.size(), value);
    out.push_back(value);
  }
  return out;
}

std::string text_with(const std::vector<double>& values) {
  judge::Shortlist s = test::plain_shortlist();
  s.candidates.resize(1);
  s.candidates[0].coefficients.clear();
  for (const double value : values) s.candidates[0].coefficients.push_back({"t", value, 0.0, 0.0});
  return report::shortlist_json(s);
}

bool same_bits(double a, double b) { return std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b); }

}  // namespace

TEST_CASE("report: JSON numbers read back to the same bits", "[report][property]") {
  std::vector<double> values{0.0,
                             -0.0,
                             1.0,
                             0.1,
                             5e-324,
                             -5e-324,
                             2.2250738585072014e-308,
                             1.7976931348623157e308,
                             9007199254740993.0,
                             1e21,
                             1e22,
                             1e23,
                             123456789012345680000.0,
                             0.30000000000000004};
  std::mt19937_64 random(20261201);
  while (values.size() < 20000) {
    const double value = std::bit_cast<double>(random());
    if (std::isfinite(value)) values.push_back(value);
  }
  const std::string text = text_with(values);
  const std::vector<double> independent = values_in(text);
  const auto again = report::read_shortlist_json(text, "shortlist.json");
  REQUIRE(again.ok());
  REQUIRE(independent.size() == values.size());
  std::size_t differing = 0;
  for (std::size_t i = 0; i < values.size(); ++i) {
    differing += !same_bits(independent[i], values[i]);
    differing += !same_bits(again->candidates[0].coefficients[i].value, values[i]);
  }
  CHECK(differing == 0);
}

TEST_CASE("report: JSON has null where a number is not finite", "[report][unit]") {
  const double infinity = std::numeric_limits<double>::infinity();
  const std::string text = text_with({std::numeric_limits<double>::quiet_NaN(), infinity, -infinity, 2.5});
  const std::vector<double> values = values_in(text);
  REQUIRE(values.size() == 4);
  CHECK(std::isnan(values[0]));
  CHECK(std::isnan(values[1]));
  CHECK(std::isnan(values[2]));
  CHECK(values[3] == 2.5);
  CHECK(text.find("NaN") == std::string::npos);
  for (const char* unreadable : {": inf", "-inf", ": Inf"}) CHECK(text.find(unreadable) == std::string::npos);
}

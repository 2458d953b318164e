#include "table/number.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <random>
#include <string>
#include <vector>

namespace formsieve::table::test {

namespace {

/// Reads `text` followed by other bytes, as in the middle of a file, and by nothing, as at its end; both must agree.
std::optional<double> read_both_ways(const std::string& text, char decimal) {
  const std::optional<double> alone = parse_number(text, decimal);
  const std::string in_file = text + ";next cell, and more of the file";
  double value = 0.0;
  const char* after = scan_number(in_file.data(), in_file.data() + in_file.size(), decimal, value);
  const bool is_whole = after == in_file.data() + text.size();
  if (alone.has_value() != is_whole || (is_whole && std::memcmp(&value, &*alone, sizeof value) != 0))
    FAIL("read differently in a file and alone: " + text);
  return alone;
}

/// The same bits as strtod of the C library (correctly rounded in glibc), for either decimal mark.
void check_against_strtod(const std::string& text) {
  const double expected = std::strtod(text.c_str(), nullptr);
  const std::optional<double> point = read_both_ways(text, '.');
  std::string with_comma = text;
  std::replace(with_comma.begin(), with_comma.end(), '.', ',');
  const std::optional<double> comma = read_both_ways(with_comma, ',');
  if (!point || !comma || std::memcmp(&*point, &expected, 8) != 0 || std::memcmp(&*comma, &expected, 8) != 0)
    FAIL("differs from strtod: " + text);
}

std::string format(const char* pattern, double value) {
  char buffer[512];
  std::snprintf(buffer, sizeof buffer, pattern, value);
  return buffer;
}

TEST_CASE("table: numbers have the bits of strtod when doubles of all magnitudes are written in full",
          "[table][reference]") {
  std::mt19937_64 random(1);
  std::size_t n = 0;
  while (n < 100000) {
    const std::uint64_t bits = random();
    double value = 0.0;
    std::memcpy(&value, &bits, 8);
    if (!std::isfinite(value)) continue;
    check_against_strtod(format("%.17g", value));
    check_against_strtod(format("%.12e", value));
    ++n;
  }
}

TEST_CASE("table: numbers have the bits of strtod when they look like measurements", "[table][reference]") {
  std::mt19937_64 random(2);
  std::lognormal_distribution<double> size(3.0, 4.0);
  for (int i = 0; i < 100000; ++i) {
    const double value = (random() % 2 == 0 ? 1 : -1) * size(random);
    for (const char* pattern : {"%.0f", "%.1f", "%.2f", "%.3f", "%.6f", "%.8f", "%.9f", "%g"})
      check_against_strtod(format(pattern, value));
  }
}

TEST_CASE("table: numbers have the bits of strtod whatever the count of digits", "[table][reference]") {
  std::mt19937_64 random(3);
  for (int whole = 1; whole <= 25; ++whole) {
    for (int fraction = 0; fraction <= 25; ++fraction) {
      for (int repeat = 0; repeat < 20; ++repeat) {
        std::string text = repeat % 3 == 0 ? "-" : "";
        for (int i = 0; i < whole; ++i) text += static_cast<char>('0' + random() % 10);
        if (fraction > 0) text += '.';
        for (int i = 0; i < fraction; ++i) text += static_cast<char>('0' + random() % 10);
        check_against_strtod(text);
        check_against_strtod(text + "e-7");
      }
    }
  }
}

TEST_CASE("table: numbers half way between two doubles are rounded to even", "[table][reference]") {
  // 2^53 + 1 and its neighbours; 1 + 2^-53 in full; the smallest subnormal and half of it; from the definition of
  // binary64.
  for (const char* text :
       {"9007199254740992", "9007199254740993", "9007199254740994", "9007199254740995", "90071992.54740993",
        "1.00000000000000011102230246251565404236316680908203125",
        "1.00000000000000011102230246251565404236316680908203124", "4.9406564584124654e-324", "2.4703282292062327e-324",
        "2.4703282292062328e-324", "1.7976931348623157e308", "2.2250738585072011e-308", "0.1", "0.3", "1e23", "8.5e22"})
    check_against_strtod(text);
}

TEST_CASE("table: numbers are accepted in every plain notation", "[table][unit]") {
  const std::vector<std::pair<const char*, double>> cases = {{"0", 0},
                                                             {"+5", 5},
                                                             {"-5", -5},
                                                             {"5.", 5},
                                                             {".5", 0.5},
                                                             {"-.5", -0.5},
                                                             {"+.5", 0.5},
                                                             {"007", 7},
                                                             {"1e3", 1000},
                                                             {"1E+3", 1000},
                                                             {"2.5e-1", 0.25},
                                                             {"1e-400", 0},
                                                             {"00000000012", 12},
                                                             {"123456789", 123456789},
                                                             {"1.e2", 100}};
  for (const auto& [text, expected] : cases) {
    CAPTURE(text);
    REQUIRE(read_both_ways(text, '.').has_value());
    CHECK(*read_both_ways(text, '.') == expected);
  }
  CHECK(std::signbit(*parse_number("-0", '.')));
}

TEST_CASE("table: words, hexadecimal and broken numbers are no numbers", "[table][unit]") {
  for (const char* text :
       {"",       "+",        "-",        ".",     "-.",     "+-5",  "--5",   "-+5",  "++5", "1e",  "1e+",  "e5",
        "1.2.3",  "1..2",     "1,5",      "0x1A",  "0x1p3",  "inf",  "-inf",  "+inf", "INF", "nan", "-nan", "NaN",
        "nan(1)", "infinity", "Infinity", "1e309", "-1e999", "12 3", "1_000", "5%",   "1f",  "1d5", "½",    "١٢"}) {
    CAPTURE(text);
    CHECK_FALSE(parse_number(text, '.').has_value());
    const std::string in_file = std::string(text) + ";more of the file follows here";
    double value = 0.0;
    const char* after = scan_number(in_file.data(), in_file.data() + in_file.size(), '.', value);
    CHECK(after != in_file.data() + std::strlen(text));
  }
}

TEST_CASE("table: a number reaches exactly to its last digit at the end of the text", "[table][unit]") {
  const std::string text = "12345678.12345678";
  for (std::size_t length = 1; length <= text.size(); ++length) {
    const std::vector<char> exact(text.begin(),
                                  text.begin() + static_cast<std::ptrdiff_t>(length));  // for the sanitizer
    double value = 0.0;
    const char* after = scan_number(exact.data(), exact.data() + exact.size(), '.', value);
    CHECK(after == exact.data() + exact.size());
    CHECK(value == std::strtod(text.substr(0, length).c_str(), nullptr));
  }
}

TEST_CASE("table: figures in notations that are not guessed at are recognised as such", "[table][unit]") {
  const std::vector<std::pair<const char*, NumberKind>> cases = {{"12.5", NumberKind::number},
                                                                 {"1,234", NumberKind::grouped},
                                                                 {"1,234,567.5", NumberKind::grouped},
                                                                 {"-12 000", NumberKind::grouped},
                                                                 {"1'000", NumberKind::grouped},
                                                                 {"1.234.567", NumberKind::grouped},
                                                                 {"1.234,5", NumberKind::grouped},
                                                                 {"1\u202F234", NumberKind::grouped},
                                                                 {"1_000", NumberKind::grouped},
                                                                 {"1,5", NumberKind::other_mark},
                                                                 {"0,123", NumberKind::other_mark},
                                                                 {"1234,567", NumberKind::other_mark},
                                                                 {"1e999", NumberKind::too_large},
                                                                 {"-1e400", NumberKind::too_large},
                                                                 {"NaN", NumberKind::not_finite},
                                                                 {"-Inf", NumberKind::not_finite},
                                                                 {"infinity", NumberKind::not_finite},
                                                                 {"12%", NumberKind::percent},
                                                                 {"12,5 %", NumberKind::percent},
                                                                 {"−5", NumberKind::special_sign},
                                                                 {"–5.5", NumberKind::special_sign},
                                                                 {"5\u00A0", NumberKind::odd_space},
                                                                 {"€ 12", NumberKind::currency},
                                                                 {"$1,200", NumberKind::currency},
                                                                 {"12 €", NumberKind::currency},
                                                                 {"12 kWh", NumberKind::text},
                                                                 {"0x1A", NumberKind::text},
                                                                 {"12A", NumberKind::text},
                                                                 {"1,2,3", NumberKind::text},
                                                                 {"12,34,567", NumberKind::text},
                                                                 {"2024-01-05", NumberKind::text},
                                                                 {"12.05.2024", NumberKind::text},
                                                                 {"nano", NumberKind::text},
                                                                 {"%", NumberKind::text},
                                                                 {"−", NumberKind::text},
                                                                 {"0,123,456", NumberKind::text}};
  for (const auto& [text, expected] : cases) {
    CAPTURE(text);
    CHECK(classify_number(text, '.') == expected);
  }
  CHECK(classify_number("1.5", ',') == NumberKind::other_mark);
  CHECK(classify_number("1.234", ',') == NumberKind::grouped);
  CHECK(classify_number("1,234", ',') == NumberKind::number);
}

}  // namespace

}  // namespace formsieve::table::test

#include "report/value_text.hpp"

#include <nlohmann/json.hpp>

#include <array>
#include <charconv>
#include <cmath>
#include <cstdint>
#include <cstring>

namespace formsieve::report {

namespace {

/// Between these sizes a value is written without an exponent, and the power of ten that brings it to kValueDigits
/// digits before the point is a double without error.
constexpr double kSmallestPlain = 1e-5, kLargestPlain = 1e15;
constexpr std::uint64_t kFirst = 1'000'000'000;  ///< smallest number of kValueDigits digits
static_assert(kValueDigits == 10);

constexpr std::array<double, 23> kPowers = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,  1e8,  1e9,  1e10, 1e11,
                                            1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};

double scaled(double size, int exponent) {
  const int power = kValueDigits - 1 - exponent;
  return power >= 0 ? size * kPowers[static_cast<std::size_t>(power)]
                    : size / kPowers[static_cast<std::size_t>(-power)];
}

/// floor(log10(size)) or one more or less.
int rough_exponent(double size) {
  int binary = 0;
  (void)std::frexp(size, &binary);
  return static_cast<int>(std::floor((binary - 1) * 0.30103));
}

/// Ten digits and the place of the first: size ≈ 0.d₁d₂… · 10^(exponent + 1).
struct Decimal {
  std::uint64_t digits;
  int exponent;
};

Decimal decimal_of(double size) {
  int exponent = rough_exponent(size);
  double value = scaled(size, exponent);
  if (value >= 10.0 * static_cast<double>(kFirst)) value = scaled(size, ++exponent);
  if (value < static_cast<double>(kFirst)) value = scaled(size, --exponent);
  auto digits = static_cast<std::uint64_t>(value + 0.5);
  if (digits >= 10 * kFirst) {
    digits /= 10;
    ++exponent;
  }
  return {digits, exponent};
}

}  // namespace

char* write_value(char* at, double value) {
  const double size = std::abs(value);
  if (size == 0.0) {
    *at++ = '0';
    return at;
  }
  if (!(size >= kSmallestPlain && size < kLargestPlain))
    return std::to_chars(at, at + kValueBytes, value, std::chars_format::general, kValueDigits).ptr;
  if (value < 0.0) *at++ = '-';
  const auto [number, exponent] = decimal_of(size);
  char digits[kValueDigits];
  std::to_chars(digits, digits + kValueDigits, number);
  int last = kValueDigits;
  while (last > 1 && digits[last - 1] == '0') --last;
  const int whole = exponent + 1;  // digits before the point
  if (whole <= 0) {
    *at++ = '0';
    *at++ = '.';
    for (int i = whole; i < 0; ++i) *at++ = '0';
    std::memcpy(at, digits, static_cast<std::size_t>(last));
    return at + last;
  }
  for (int i = 0; i < whole; ++i) *at++ = i < last ? digits[i] : '0';
  if (last <= whole) return at;
  *at++ = '.';
  std::memcpy(at, digits + whole, static_cast<std::size_t>(last - whole));
  return at + (last - whole);
}

void append_cell(std::string& text, std::string_view cell) {
  if (cell.find_first_of(",\"\r\n") == cell.npos) {
    text += cell;
    return;
  }
  text += '"';
  for (const char c : cell) {
    if (c == '"') text += '"';
    text += c;
  }
  text += '"';
}

void append_json_string(std::string& text, std::string_view cell) {
  text += nlohmann::json(cell).dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
}

}  // namespace formsieve::report

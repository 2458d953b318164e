#include "numbers.hpp"

#include <array>
#include <charconv>
#include <cmath>

namespace formsieve::cli {
namespace {

// From here on a plain figure has more digits than the eye can count, and is written with an exponent.
constexpr double kLongestPlain = 1e7;
constexpr double kSmallestPlain = 1e-4;
constexpr std::size_t kLongestFigure = 15;

std::string raw_fixed(double value, int decimals) {
  std::array<char, 400> buffer{};
  const auto [end, error] =
      std::to_chars(buffer.data(), buffer.data() + buffer.size(), value, std::chars_format::fixed, decimals);
  return error == std::errc() ? std::string(buffer.data(), end) : std::string("undefined");
}

std::string without_trailing_zeros(std::string text) {
  if (text.find('.') == std::string::npos) return text;
  while (text.back() == '0') text.pop_back();
  if (text.back() == '.') text.pop_back();
  return text;
}

// "1234567" as "1,234,567".
std::string in_threes(std::string_view digits) {
  std::string text;
  for (std::size_t i = 0; i < digits.size(); ++i) {
    if (i > 0 && (digits.size() - i) % 3 == 0) text += ',';
    text += digits[i];
  }
  return text;
}

// Groups the whole part and writes a true minus sign, except before a figure that has been rounded to zero.
std::string dressed(std::string text) {
  const bool negative = text.starts_with('-');
  if (negative) text.erase(0, 1);
  const std::size_t point = text.find('.');
  const std::string whole = text.substr(0, point);
  const std::string rest = point == std::string::npos ? std::string() : text.substr(point);
  const bool zero = text.find_first_not_of("0.") == std::string::npos;
  return (negative && !zero ? "−" : "") + in_threes(whole) + rest;
}

std::string exponential(double value, int digits) {
  std::array<char, 64> buffer{};
  const auto [end, error] =
      std::to_chars(buffer.data(), buffer.data() + buffer.size(), value, std::chars_format::scientific, digits - 1);
  if (error != std::errc()) return "undefined";
  const std::string text(buffer.data(), end);
  const std::size_t e = text.find('e');
  std::string exponent = text.substr(e + 1);
  const bool negative = exponent.front() == '-';
  exponent.erase(0, exponent.find_first_not_of("+-0"));
  return dressed(without_trailing_zeros(text.substr(0, e))) + "e" + (negative ? "−" : "") + exponent;
}

std::string two_units(double large, const char* large_unit, double small, const char* small_unit) {
  std::string text = raw_fixed(large, 0);
  text.append(" ").append(large_unit);
  if (small >= 0.5) text.append(" ").append(raw_fixed(small, 0)).append(" ").append(small_unit);
  return text;
}

}  // namespace

std::string grouped(std::string_view digits) {
  const std::size_t sign = digits.starts_with('-') ? 1 : 0;
  if (digits.size() == sign || digits.find_first_not_of("0123456789", sign) != std::string_view::npos) {
    return std::string(digits);
  }
  constexpr std::size_t kMost = 18;  // longer ones nobody can read
  if (digits.size() - sign > kMost) {
    std::string text(digits.substr(0, sign + 1));
    return text.append(".").append(digits.substr(sign + 1, 2)).append("·10^") +
           std::to_string(digits.size() - sign - 1);
  }
  return std::string(digits.substr(0, sign)) + in_threes(digits.substr(sign));
}

std::string grouped(std::size_t count) { return grouped(std::to_string(count)); }

int decimals_for(double value, int digits) {
  if (value == 0.0 || !std::isfinite(value)) return 0;
  const int before_point = static_cast<int>(std::floor(std::log10(std::fabs(value)))) + 1;
  return std::max(0, digits - before_point);
}

std::string significant(double value, int digits) {
  if (!std::isfinite(value)) return "undefined";
  const double size = std::fabs(value);
  if (size == 0.0) return "0";
  if (size >= kLongestPlain || size < kSmallestPlain) return exponential(value, digits);
  return dressed(without_trailing_zeros(raw_fixed(value, decimals_for(value, digits))));
}

std::string with_decimals(double value, int decimals) {
  if (!std::isfinite(value)) return "undefined";
  const std::string text = dressed(raw_fixed(value, decimals));
  return text.size() > kLongestFigure ? significant(value) : text;
}

std::string duration(double seconds) {
  if (!(seconds >= 0.0) || !std::isfinite(seconds)) return "an unknown time";
  constexpr double kMinute = 60.0, kHour = 3600.0, kDay = 86400.0;
  if (seconds < 0.05) return "less than 0.1 s";
  if (seconds < 9.95) return without_trailing_zeros(raw_fixed(seconds, 1)) + " s";
  const double whole = std::round(seconds);
  if (whole < kMinute) return raw_fixed(whole, 0) + " s";
  if (whole < kHour) return two_units(std::floor(whole / kMinute), "min", std::fmod(whole, kMinute), "s");
  const double minutes = std::round(seconds / kMinute) * kMinute;
  if (minutes < kDay) return two_units(std::floor(minutes / kHour), "h", std::fmod(minutes, kHour) / kMinute, "min");
  const double hours = std::round(seconds / kHour) * kHour;
  const double days = std::floor(hours / kDay);
  return two_units(days, days < 1.5 ? "day" : "days", std::fmod(hours, kDay) / kHour, "h");
}

std::string counted(std::size_t count, std::string_view singular, std::string_view plural) {
  const std::string many = plural.empty() ? std::string(singular) + "s" : std::string(plural);
  return grouped(count) + " " + (count == 1 ? std::string(singular) : many);
}

std::string rough_count(double count) {
  constexpr double kThousand = 1e3, kMillion = 1e6, kTrillion = 1e12;
  if (!std::isfinite(count)) return "an unknown number";
  if (count < 10.0 * kThousand) return dressed(raw_fixed(std::round(count), 0));
  const auto three_digits = [](double value) { return dressed(raw_fixed(value, decimals_for(value, 3))); };
  if (count < 0.9995 * kMillion) return dressed(raw_fixed(std::round(count / kThousand) * kThousand, 0));
  if (count < kTrillion) return three_digits(std::max(1.0, count / kMillion)) + " million";
  return exponential(count, 3);
}

std::string p_value(double p) {
  if (!std::isfinite(p)) return "undefined";
  return p < 0.0005 ? "below 0.001" : raw_fixed(p, 3);
}

}  // namespace formsieve::cli

#include "backtransform/words.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

namespace formsieve::backtransform {

namespace {

std::string digits_of(double size, int significant) {
  constexpr double kWholeFrom = 999.5;  // people read numbers of this size in full; 999.6 is 1,000
  constexpr double kWholeTo = 1e7;
  std::array<char, 64> buffer{};
  char* const end = buffer.data() + buffer.size();
  const bool whole = size >= kWholeFrom && size < kWholeTo && (significant <= 3 || size == std::floor(size));
  if (!whole)
    return {buffer.data(), std::to_chars(buffer.data(), end, size, std::chars_format::general, significant).ptr};
  std::string digits{buffer.data(), std::to_chars(buffer.data(), end, size, std::chars_format::fixed, 0).ptr};
  for (std::size_t at = digits.size(); at > 3; at -= 3) digits.insert(at - 3, ",");
  return digits;
}

}  // namespace

std::string number_words(double value, int significant) {
  return (value < 0.0 ? "−" : "") + digits_of(std::abs(value), significant);
}

NumberPair pair_words(double first, double second) {
  constexpr int kMostDigits = 15;
  NumberPair pair;
  for (int digits = 3; digits <= kMostDigits; ++digits) {
    pair = {number_words(first, digits), number_words(second, digits)};
    if (pair.first != pair.second || first == second) break;
  }
  return pair;
}

NumberPair range_words(double low, double high) {
  const double largest = std::max(std::abs(low), std::abs(high));
  if (!(largest >= 0.01 && largest < 999.5)) return pair_words(low, high);
  const int decimals = largest < 0.995 ? 3 : largest < 9.995 ? 2 : largest < 99.95 ? 1 : 0;
  const auto text = [&](double value) {
    std::array<char, 32> buffer{};
    const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), std::abs(value),
                                   std::chars_format::fixed, decimals);
    const std::string digits{buffer.data(), end.ptr};
    const bool zero = digits.find_first_not_of("0.") == std::string::npos;
    return (value < 0.0 && !zero ? "−" : "") + digits;
  };
  return {text(low), text(high)};
}

std::string percent_words(double share) {
  const double percent = std::abs(share) * 100.0;
  const int significant = percent >= 99.5 ? 3 : 2;  // 99.7 must not become 1e+02
  return (share < 0.0 ? "−" : "") + digits_of(percent, significant) + " %";
}

}  // namespace formsieve::backtransform

#include "judge/words.hpp"

#include <array>
#include <charconv>
#include <cmath>

namespace formsieve::judge {

namespace {

std::string digits_of(double size, int significant) {
  constexpr double kWholeFrom = 1e3;  // people read numbers of this size in full
  constexpr double kWholeTo = 1e7;
  std::array<char, 64> buffer{};
  char* const end = buffer.data() + buffer.size();
  if (size >= kWholeFrom && size < kWholeTo)
    return grouped_digits({buffer.data(), std::to_chars(buffer.data(), end, size, std::chars_format::fixed, 0).ptr});
  return {buffer.data(), std::to_chars(buffer.data(), end, size, std::chars_format::general, significant).ptr};
}

}  // namespace

std::string number_words(double value) { return (value < 0.0 ? "−" : "") + digits_of(std::abs(value), 3); }

std::string exact_words(double value) {
  std::array<char, 64> buffer{};
  const double size = std::abs(value);
  return (value < 0.0 ? "−" : "") +
         std::string(buffer.data(), std::to_chars(buffer.data(), buffer.data() + buffer.size(), size).ptr);
}

std::string percent_words(double share) {
  // 99.7 must not become 1e+02
  const double percent = std::abs(share) * 100.0;
  const int significant = percent >= 99.5 ? 3 : 2;
  return (share < 0.0 ? "−" : "") + digits_of(percent, significant) + " %";
}

std::string grouped_digits(std::string_view digits) {
  if (digits.size() > kMostGroupedDigits)
    return std::string{digits[0], '.', digits[1], digits[2]} + "·10^" + std::to_string(digits.size() - 1);
  std::string result;
  for (std::size_t i = 0; i < digits.size(); ++i) {
    if (i > 0 && (digits.size() - i) % 3 == 0) result += ',';
    result += digits[i];
  }
  return result;
}

std::string counted(std::size_t count, const std::string& noun) {
  return grouped_digits(std::to_string(count)) + " " + noun + (count == 1 ? "" : "s");
}

std::string capitalised(std::string sentence) {
  if (!sentence.empty() && sentence.front() >= 'a' && sentence.front() <= 'z')
    sentence.front() = static_cast<char>(sentence.front() - 'a' + 'A');
  return sentence;
}

}  // namespace formsieve::judge

#include "checks/words.hpp"

#include <array>
#include <charconv>
#include <cmath>

namespace formsieve::checks {

std::string number_words(double value) {
  constexpr double kWholeFrom = 1e3;  // three digits would hide the units of a number that people read in full
  constexpr double kWholeTo = 1e7;
  const double size = std::abs(value);
  std::array<char, 64> digits{};
  const auto end =
      size >= kWholeFrom && size < kWholeTo
          ? std::to_chars(digits.data(), digits.data() + digits.size(), size, std::chars_format::fixed, 0)
          : std::to_chars(digits.data(), digits.data() + digits.size(), size, std::chars_format::general, 3);
  return (value < 0.0 ? "−" : "") + std::string(digits.data(), end.ptr);
}

std::string row_words(std::span<const std::size_t> lines, std::size_t row) {
  if (row < lines.size()) return "line " + std::to_string(lines[row]);
  return "row " + std::to_string(row + 1) + " of the rows in use";
}

}  // namespace formsieve::checks

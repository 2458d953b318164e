#include "forms/text.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <numeric>

namespace formsieve::forms {

namespace {

// Between these sizes a reader takes digits more easily than a power of ten.
constexpr double kSmallestPlain = 1e-5, kLargestPlain = 1e15;

std::string digits(double value, std::string_view minus) {
  const double size = std::fabs(value);
  const bool plain = size == 0.0 || (size >= kSmallestPlain && size < kLargestPlain);
  std::array<char, 64> buffer;  // at most 17 digits, a point and leading zeros, or an exponent
  const auto format = plain ? std::chars_format::fixed : std::chars_format::scientific;
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), size, format).ptr;
  std::string text(value < 0.0 ? minus : std::string_view());
  return text.append(buffer.data(), end);
}

std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t replaced = diagonal + (a[i - 1] == b[j - 1] ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({row[j] + 1, row[j - 1] + 1, replaced});
    }
  }
  return row.back();
}

}  // namespace

std::string number_text(double value) { return digits(value, "−"); }

std::string plan_number(double value) { return digits(value, "-"); }

std::string_view nearest(std::string_view word, const std::vector<std::string_view>& known) {
  std::string_view best;
  std::size_t fewest = word.size() / 2 + 2;  // more edits than that and the words share nothing
  for (const std::string_view candidate : known) {
    const std::size_t edits = edit_distance(word, candidate);
    if (edits >= fewest) continue;
    fewest = edits;
    best = candidate;
  }
  return best;
}

}  // namespace formsieve::forms

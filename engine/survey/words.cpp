#include "survey/words.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <numeric>

namespace formsieve::survey {

namespace {

constexpr std::size_t kMostDigits = 9;  ///< characters of a number that are still read at a glance
constexpr int kRoundedDigits = 6;

std::size_t edits(const std::string& a, const std::string& b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 0; i < a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i + 1;
    for (std::size_t j = 0; j < b.size(); ++j) {
      const std::size_t replaced = diagonal + (a[i] == b[j] ? 0 : 1);
      diagonal = row[j + 1];
      row[j + 1] = std::min({row[j] + 1, row[j + 1] + 1, replaced});
    }
  }
  return row.back();
}

std::string written(double x, std::chars_format format, int precision) {
  std::array<char, 400> text{};  // the longest fixed number has 309 digits before its point
  const auto end = std::to_chars(text.data(), text.data() + text.size(), x, format, precision).ptr;
  return {text.data(), end};
}

std::string with_minus_sign(const std::string& text) { return text.starts_with('-') ? "−" + text.substr(1) : text; }

}  // namespace

std::string literal(double x) {
  std::array<char, 40> text{};
  const auto end = std::to_chars(text.data(), text.data() + text.size(), x + 0.0).ptr;
  return {text.data(), end};
}

std::string readable(double x) {
  const std::string exact = literal(x);
  return with_minus_sign(exact.size() <= kMostDigits ? exact : written(x, std::chars_format::general, kRoundedDigits));
}

std::string rounded(double x, int decimals) {
  const std::string text = written(x, std::chars_format::fixed, decimals);
  const bool zero = text.find_first_of("123456789") == std::string::npos;
  return zero && text.starts_with('-') ? text.substr(1) : with_minus_sign(text);
}

std::string listed(const std::vector<std::string>& names, std::size_t most) {
  std::string text;
  const std::size_t shown = std::min(names.size(), most);
  for (std::size_t i = 0; i < shown; ++i) {
    const bool last = i + 1 == names.size();
    text += (i == 0 ? "'" : last ? " and '" : ", '") + names[i] + "'";
  }
  if (names.size() > shown) text += " and " + std::to_string(names.size() - shown) + " more";
  return text;
}

std::optional<std::string> nearest_name(const std::string& name, const std::vector<std::string>& known) {
  const auto distance = [&](const std::string& other) { return edits(name, other); };
  const auto best = std::min_element(known.begin(), known.end(), [&](const std::string& a, const std::string& b) {
    return distance(a) < distance(b);
  });
  if (best == known.end() || distance(*best) > std::max<std::size_t>(1, name.size() / 3)) return std::nullopt;
  return *best;
}

}  // namespace formsieve::survey

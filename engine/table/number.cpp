#include "table/number.hpp"

#include <algorithm>
#include <array>
#include <string>

namespace formsieve::table {

namespace {

using std::string_view_literals::operator""sv;

/// Separators of digit groups in use: comma, point, blank, apostrophes, underscore, no-break and thin spaces.
constexpr std::array kGroupMarks = {","sv, "."sv, " "sv, "'"sv, "_"sv, "\u2019"sv, "\u00A0"sv, "\u202F"sv, "\u2009"sv};
constexpr std::array kOddSpaces = {"\u00A0"sv, "\u202F"sv, "\u2009"sv, "\u2007"sv, "\u200B"sv, "\uFEFF"sv};
constexpr std::array kSpecialMinus = {"\u2212"sv, "\u2010"sv, "\u2011"sv, "\u2012"sv, "\u2013"sv};
constexpr std::array kCurrencies = {"\u20AC"sv, "$"sv, "\u00A3"sv};

std::string_view without_sign(std::string_view text) {
  if (!text.empty() && (text.front() == '+' || text.front() == '-')) text.remove_prefix(1);
  return text;
}

std::string_view trim_blanks(std::string_view text) {
  while (!text.empty() && (text.front() == ' ' || text.front() == '\t')) text.remove_prefix(1);
  while (!text.empty() && (text.back() == ' ' || text.back() == '\t')) text.remove_suffix(1);
  return text;
}

std::size_t leading_digits(std::string_view text) {
  return static_cast<std::size_t>(std::find_if_not(text.begin(), text.end(), is_digit) - text.begin());
}

/// "1,234.5" with group mark ',': groups of three after a first group of one to three, then an optional other mark and
/// digits.
bool is_grouped_by(std::string_view text, std::string_view mark) {
  const std::size_t first = leading_digits(text);
  if (first < 1 || first > 3 || text.front() == '0') return false;
  text.remove_prefix(first);
  std::size_t n_groups = 0;
  while (text.starts_with(mark) && leading_digits(text.substr(mark.size())) == 3) {
    text.remove_prefix(mark.size() + 3);
    ++n_groups;
  }
  if (n_groups == 0) return false;
  if (text.empty()) return true;
  const bool other_mark = (text.front() == '.' || text.front() == ',') && text.substr(0, 1) != mark;
  return other_mark && leading_digits(text.substr(1)) == text.size() - 1;
}

bool is_grouped(std::string_view text) {
  const std::string_view digits = without_sign(text);
  return std::any_of(kGroupMarks.begin(), kGroupMarks.end(),
                     [&](std::string_view mark) { return is_grouped_by(digits, mark); });
}

bool is_non_finite_word(std::string_view text) {
  std::string word(without_sign(text).substr(0, 9));
  std::transform(word.begin(), word.end(), word.begin(),
                 [](char c) { return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c; });
  return word == "nan" || word == "inf" || word == "infinity";
}

/// True for well-formed numerals whose value is beyond the largest double.
bool is_too_large(std::string_view text, char decimal) {
  const std::string_view digits = without_sign(text);
  if (digits.empty() || !is_digit(digits.front())) return false;
  double value = 0.0;
  const auto result =
      fast_float::from_chars_advanced(digits.data(), digits.data() + digits.size(), value,
                                      fast_float::parse_options{fast_float::chars_format::general, decimal});
  return result.ptr == digits.data() + digits.size() && std::isinf(value);
}

/// A figure in any of the ways that are recognised, by itself or with digit groups.
bool is_figure(std::string_view text) {
  return parse_number(text, '.').has_value() || parse_number(text, ',').has_value() || is_grouped(text);
}

/// True when taking one of `parts` off either end leaves a figure.
template <std::size_t n>
bool is_figure_beside(std::string_view text, const std::array<std::string_view, n>& parts) {
  return std::any_of(parts.begin(), parts.end(), [&](std::string_view part) {
    std::string_view rest = text;
    while (rest.starts_with(part)) rest.remove_prefix(part.size());
    while (rest.ends_with(part)) rest.remove_suffix(part.size());
    return rest.size() < text.size() && is_figure(trim_blanks(rest));
  });
}

bool has_special_minus(std::string_view text) {
  return std::any_of(kSpecialMinus.begin(), kSpecialMinus.end(), [&](std::string_view minus) {
    return text.starts_with(minus) && text.size() > minus.size() && is_figure(text.substr(minus.size()));
  });
}

}  // namespace

bool has_one_group_of_three(std::string_view text, char mark) {
  const std::string_view digits = without_sign(text);
  const std::size_t first = leading_digits(digits);
  return first >= 1 && first <= 3 && digits.front() != '0' && digits.size() == first + 4 && digits[first] == mark &&
         leading_digits(digits.substr(first + 1)) == 3;
}

NumberKind classify_number(std::string_view text, char decimal) {
  if (parse_number(text, decimal)) return NumberKind::number;
  if (is_non_finite_word(text)) return NumberKind::not_finite;
  // Most texts end here: a figure has a digit.
  if (std::none_of(text.begin(), text.end(), is_digit)) return NumberKind::text;
  if (is_grouped(text)) return NumberKind::grouped;
  if (parse_number(text, decimal == '.' ? ',' : '.')) return NumberKind::other_mark;
  if (is_too_large(text, decimal)) return NumberKind::too_large;
  if (text.back() == '%' && is_figure(trim_blanks(text.substr(0, text.size() - 1)))) return NumberKind::percent;
  if (has_special_minus(text)) return NumberKind::special_sign;
  if (is_figure_beside(text, kOddSpaces)) return NumberKind::odd_space;
  if (is_figure_beside(text, kCurrencies)) return NumberKind::currency;
  return NumberKind::text;
}

}  // namespace formsieve::table

// Numbers as cells write them, read with correct rounding; and near-numbers, recognised so that none passes for text.
#pragma once

#include "table/short_decimal.hpp"

#include <fast_float/fast_float.h>

#include <cmath>
#include <optional>
#include <string_view>
#include <system_error>

namespace formsieve::table {

constexpr bool is_digit(char c) noexcept { return c >= '0' && c <= '9'; }

/// Reads the number that starts at `p`: an optional sign (+ or −), decimal digits with at most one decimal mark, at
/// least one digit, an optional exponent (e or E). Returns the position after it and sets `value` to the nearest double
/// (ties to even; too small becomes 0), or returns null when there is no number or it is beyond the largest double.
/// Words (inf, nan, infinity) and hexadecimal notation are no numbers. `end` bounds the reading; `decimal` is '.' or
/// ','.
inline const char* scan_number(const char* p, const char* end, char decimal, double& value) noexcept {
  if (end - p >= kShortDecimalBytes) {
    const char* const after = scan_short_decimal(p, decimal, value);
    if (after != nullptr && !is_digit(*after) && *after != 'e' && *after != 'E' && *after != decimal) return after;
  }
  if (p == end) return nullptr;
  const char* digits = p + (*p == '-' || *p == '+' ? 1 : 0);
  if (digits == end || !(is_digit(*digits) || *digits == decimal)) return nullptr;
  const fast_float::from_chars_result result = fast_float::from_chars_advanced(
      *p == '+' ? digits : p, end, value, fast_float::parse_options{fast_float::chars_format::general, decimal});
  if (result.ec != std::errc{} || !std::isfinite(value)) return nullptr;
  return result.ptr;
}

/// The whole of `text` as one number by the rules of scan_number, or nothing.
inline std::optional<double> parse_number(std::string_view text, char decimal) noexcept {
  double value = 0.0;
  const char* end = text.data() + text.size();
  if (text.empty() || scan_number(text.data(), end, decimal, value) != end) return std::nullopt;
  return value;
}

/// What a cell is, as far as numbers go. All but `number` and `text` are figures written in a way that is not guessed
/// at.
enum class NumberKind {
  number,
  grouped,       ///< digits in groups of three: "1,234.5", "12 000", "1'000"
  other_mark,    ///< a number with the other decimal mark: "1,5" where the mark is '.'
  too_large,     ///< beyond the largest double: "1e999"
  not_finite,    ///< the words nan, inf, infinity, in any case, with or without sign
  percent,       ///< "12 %"
  special_sign,  ///< a number with a typographic minus (U+2212) or hyphen
  odd_space,     ///< a number with a no-break or other special space around it
  currency,      ///< a number beside €, $ or £
  text,
};

/// Classifies a trimmed, non-empty cell.
NumberKind classify_number(std::string_view text, char decimal);

/// True when `text` is digits in one group of three after a mark, "1,234" or "12.345" with that `mark`, first group
/// without leading zero: the same cell reads as a decimal number and as a whole one with a thousands separator.
bool has_one_group_of_three(std::string_view text, char mark);

}  // namespace formsieve::table

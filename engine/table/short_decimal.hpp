// The common case of a number in a table, read eight digits at a time: the hot path of the CSV reader.
#pragma once

#include <array>
#include <bit>
#include <cstdint>
#include <cstring>

namespace formsieve::table {

/// Digits at the start of eight bytes.
struct DigitRun {
  unsigned length;      ///< 0 to 8
  std::uint64_t value;  ///< of these digits
};

/// Reads the digits at the start of the eight bytes at `p`, without a branch on how many there are.
inline DigitRun read_digits(const char* p) noexcept {
  static_assert(std::endian::native == std::endian::little, "the first byte is taken to be the lowest");
  std::uint64_t bytes = 0;
  std::memcpy(&bytes, p, 8);
  bytes ^= 0x3030303030303030U;  // '0' … '9' become 0 … 9, all other bytes more
  // The high bit of each byte above 9; a carry can spoil only bytes behind the first of these.
  const std::uint64_t others = ((bytes + 0x7676767676767676U) | bytes) & 0x8080808080808080U;
  const auto length = static_cast<unsigned>(std::countr_zero(others)) / 8;
  const unsigned half_shift = 4 * (8 - length);  // in two halves, since 64 places at once are undefined
  bytes = bytes << half_shift << half_shift;     // leading zeros
  bytes = bytes * 10 + (bytes >> 8U);            // pairs of digits
  constexpr std::uint64_t kPairs = 0x000000FF000000FFU;
  const std::uint64_t high = (bytes & kPairs) * (100 + (1000000ULL << 32U));
  const std::uint64_t low = ((bytes >> 16U) & kPairs) * (1 + (10000ULL << 32U));
  return {length, (high + low) >> 32U};
}

/// Bytes that scan_short_decimal may look at: sign, digits, mark, digits, and what follows.
inline constexpr std::ptrdiff_t kShortDecimalBytes = 1 + 8 + 1 + 16 + 1;

/// Reads an optional '-', one to eight digits and, behind a decimal mark, up to sixteen more. Returns the position
/// after them, or null when that is not how `p` begins. The text may go on as a number there (a further digit, an
/// exponent); it is for the caller to look. The value is correctly rounded: the digits as a whole number (at most 2^53)
/// and the power of ten (at most 10^16) are doubles without error, so that their quotient is rounded once (Clinger
/// 1990, "How to read floating point numbers accurately"). At least kShortDecimalBytes must be readable at `p`.
inline const char* scan_short_decimal(const char* p, char decimal, double& value) noexcept {
  constexpr std::array<std::uint32_t, 9> kPowers = {1, 10, 100, 1000, 10000, 100000, 1000000, 10000000, 100000000};
  constexpr std::uint64_t kExactIntegers = std::uint64_t{1} << 53U;
  const bool is_negative = *p == '-';
  p += is_negative ? 1 : 0;
  const DigitRun whole = read_digits(p);
  if (whole.length == 0) return nullptr;
  p += whole.length;
  std::uint64_t digits = whole.value;
  double scale = 1;
  if (*p == decimal) {
    const DigitRun fraction = read_digits(p + 1);
    p += 1 + fraction.length;
    digits = digits * kPowers[fraction.length] + fraction.value;
    scale = kPowers[fraction.length];
    if (fraction.length == 8) {
      const DigitRun more = read_digits(p);
      // Below 10^11 the eight further digits cannot overflow.
      if (digits >= 100'000'000'000U) return nullptr;
      p += more.length;
      digits = digits * kPowers[more.length] + more.value;
      scale *= kPowers[more.length];
    }
  }
  if (digits > kExactIntegers) return nullptr;
  // The sign bit is set without a branch, since the signs of a column may follow no pattern.
  const auto sign = static_cast<std::uint64_t>(is_negative) << 63U;
  value = std::bit_cast<double>(std::bit_cast<std::uint64_t>(static_cast<double>(digits) / scale) | sign);
  return p;
}

}  // namespace formsieve::table

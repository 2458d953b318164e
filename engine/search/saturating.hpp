// Counts that stop at the largest number instead of overflowing.
#pragma once

#include <cstdint>
#include <limits>

namespace formsieve::search {

inline constexpr std::uint64_t kCountless = std::numeric_limits<std::uint64_t>::max();

inline std::uint64_t saturating_add(std::uint64_t a, std::uint64_t b) {
  return a > kCountless - b ? kCountless : a + b;
}
inline std::uint64_t saturating_multiply(std::uint64_t a, std::uint64_t b) {
  return b != 0 && a > kCountless / b ? kCountless : a * b;
}

}  // namespace formsieve::search

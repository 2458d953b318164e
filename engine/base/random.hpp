// A random generator whose numbers, and what is drawn from them, are the same on every machine and compiler.
#pragma once

#include <cstdint>
#include <limits>
#include <span>
#include <utility>

namespace formsieve::base {

/// SplitMix64 (Steele, Lea & Flood 2014, fig. 17).
class SplitMix64 {
 public:
  explicit SplitMix64(std::uint64_t seed) : state_(seed) {}

  std::uint64_t next() {
    state_ += 0x9e3779b97f4a7c15U;
    std::uint64_t z = state_;
    z = (z ^ (z >> 30U)) * 0xbf58476d1ce4e5b9U;
    z = (z ^ (z >> 27U)) * 0x94d049bb133111ebU;
    return z ^ (z >> 31U);
  }

  /// Each of 0 … n − 1 with the same probability: the numbers beyond the last whole multiple of n are drawn again.
  std::uint64_t below(std::uint64_t n) {
    const std::uint64_t last = std::numeric_limits<std::uint64_t>::max();
    const std::uint64_t surplus = (last % n + 1) % n;  // 2^64 mod n
    std::uint64_t drawn = next();
    while (drawn > last - surplus) drawn = next();
    return drawn % n;
  }

 private:
  std::uint64_t state_;
};

/// Fisher & Yates in the order of Durstenfeld 1964: every permutation with the same probability.
template <class T>
void shuffle(std::span<T> values, SplitMix64& random) {
  for (std::size_t i = values.size(); i > 1; --i) std::swap(values[i - 1], values[random.below(i)]);
}

}  // namespace formsieve::base

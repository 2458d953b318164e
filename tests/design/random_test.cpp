#include "design/random.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

using formsieve::design::SplitMix64;

TEST_CASE("design: the random generator gives SplitMix64's numbers", "[design][reference]") {
  // folds_reference.py (Python 3.11.2); the same three are in common use as the generator's test vector (from memory)
  SplitMix64 random(1234567);
  CHECK(random.next() == 6457827717110365317U);
  CHECK(random.next() == 3203168211198807973U);
  CHECK(random.next() == 9817491932198370423U);
}

TEST_CASE("design: bounded random numbers are spread evenly", "[design][property]") {
  SplitMix64 random(3);
  for (const std::uint64_t n : {1u, 2u, 3u, 7u, 64u}) {
    std::vector<double> counts(n, 0.0);
    constexpr int kDraws = 20000;
    for (int i = 0; i < kDraws; ++i) counts[random.below(n)] += 1.0;
    const double expected = kDraws / static_cast<double>(n);
    double chi_squared = 0.0;
    for (const double count : counts) chi_squared += (count - expected) * (count - expected) / expected;
    // mean n − 1, variance 2 (n − 1): six standard deviations
    const double degrees = static_cast<double>(n) - 1.0;
    CHECK(chi_squared <= degrees + 6.0 * std::sqrt(2.0 * degrees));
  }
}

TEST_CASE("design: bounded random numbers have no bias near the top of the range", "[design][property]") {
  // With n = 3·2^62 a remainder without redrawing would give the lower third twice as often as the rest.
  SplitMix64 random(4);
  const std::uint64_t n = std::uint64_t{3} << 62U;
  int in_lower_third = 0;
  for (int i = 0; i < 30000; ++i) in_lower_third += random.below(n) < (std::uint64_t{1} << 62U) ? 1 : 0;
  CHECK(in_lower_third > 9500);
  CHECK(in_lower_third < 10500);
}

TEST_CASE("design: shuffling reaches every order equally often", "[design][property]") {
  SplitMix64 random(5);
  std::vector<int> counts(256, 0);
  for (int i = 0; i < 24000; ++i) {
    std::vector<int> values = {0, 1, 2, 3};
    formsieve::design::shuffle(std::span(values), random);
    ++counts[static_cast<std::size_t>(values[0] * 64 + values[1] * 16 + values[2] * 4 + values[3])];
  }
  int orders = 0;
  for (const int count : counts) {
    if (count == 0) continue;
    ++orders;
    CHECK(count > 800);  // expected 1000, standard deviation 31
    CHECK(count < 1200);
  }
  CHECK(orders == 24);
}

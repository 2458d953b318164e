// The walked quantile against sorting, and what is kept of many residuals.
#include "model/cross_quantile.hpp"
#include "model/held_out.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <random>
#include <vector>

namespace formsieve::model::test {

namespace {

/// The definition: everything written out and sorted.
double sorted_quantile(const std::vector<Fold>& folds, const std::vector<double>& offsets, double sign, double scale,
                       double level) {
  std::vector<double> all;
  for (std::size_t g = 0; g < folds.size(); ++g)
    for (std::size_t i = 0; i < folds[g].residuals.size(); ++i)
      all.insert(all.end(), folds[g].counts.empty() ? 1 : folds[g].counts[i],
                 sign * offsets[g] + scale * folds[g].residuals[i]);
  std::sort(all.begin(), all.end());
  const auto n = static_cast<double>(all.size());
  const auto rank = static_cast<std::size_t>(n + 1 - std::floor((1.0 - level) * (n + 1) * (1 + 1e-12)));
  return all.at(rank - 1);
}

std::vector<double> rising(std::mt19937_64& random, std::size_t n, bool ties) {
  std::normal_distribution<double> normal;
  std::vector<double> values;
  for (std::size_t i = 0; i < n; ++i) {
    const double value = std::abs(normal(random));
    values.push_back(ties ? std::floor(4.0 * value) : value);
  }
  std::sort(values.begin(), values.end());
  return values;
}

}  // namespace

TEST_CASE("model: the walked CV+ quantile is that of all residuals sorted, to the bit", "[model][property]") {
  std::mt19937_64 random(7);
  std::normal_distribution<double> normal;
  for (int repeat = 0; repeat < 300; ++repeat) {
    const std::size_t k = 2 + random() % 40;
    std::vector<Fold> folds;
    for (std::size_t g = 0; g < k; ++g) {
      const std::size_t m = repeat % 10 == 0 ? 900 + random() % 600 : 3 + random() % 30;
      folds.push_back(
          fold_record({}, g == 1 && repeat % 3 == 0 ? std::vector<double>() : rising(random, m, repeat % 4 == 0)));
    }
    const double level = std::vector{0.5, 0.8, 0.9, 0.95}[random() % 4];
    const CrossQuantile quantile(folds, level);
    if (!quantile.exists()) continue;
    const double spread = std::vector{0.0, 0.01, 0.3, 50.0}[random() % 4];
    const double scale = repeat % 2 == 0 ? 1.0 : 0.1 + std::abs(normal(random));
    std::vector<double> offsets(k);
    for (double& offset : offsets) offset = 3.0 + spread * normal(random);
    for (const double sign : {1.0, -1.0})
      REQUIRE(quantile.at(offsets.data(), 1, sign, scale) == sorted_quantile(folds, offsets, sign, scale, level));
  }
}

TEST_CASE("model: too few residuals have no CV+ interval", "[model][unit]") {
  CHECK_FALSE(CrossQuantile({{{}, std::vector<double>(18, 1.0), {}}}, 0.95).exists());
  CHECK(CrossQuantile({{{}, std::vector<double>(19, 1.0), {}}}, 0.95).exists());
  CHECK_FALSE(CrossQuantile({}, 0.95).exists());
}

TEST_CASE("model: condensed residuals count every row and never lie below their own", "[model][property]") {
  std::mt19937_64 random(8);
  for (const std::size_t n : {1UL, 1001UL, 1002UL, 1500UL, 5000UL, 100000UL}) {
    const std::vector<double> all = rising(random, n, false);
    const Fold fold = fold_record({}, all);
    CHECK(fold.residuals.size() <= kMostHeldOut);
    CHECK(fold.counts.empty() == (n <= kMostHeldOut));
    CHECK(std::is_sorted(fold.residuals.begin(), fold.residuals.end()));
    std::size_t i = 0;
    for (std::size_t j = 0; j < fold.residuals.size(); ++j)
      for (std::uint64_t c = fold.counts.empty() ? 1 : fold.counts[j]; c > 0; --c)
        REQUIRE(all.at(i++) <= fold.residuals[j]);
    CHECK(i == n);
    // From the 90th to the 99th hundredth the next kept rank is a ten-thousandth of the rows away, or the very next.
    const auto at = [&](double share) { return static_cast<std::size_t>(share * static_cast<double>(n - 1)); };
    i = 0;
    for (std::size_t j = 0; j < fold.counts.size(); ++j) {
      i += fold.counts[j];
      if (i > at(0.901) && i < at(0.989)) REQUIRE(fold.counts[j] <= 1 + n / 8000);
    }
  }
}

}  // namespace formsieve::model::test

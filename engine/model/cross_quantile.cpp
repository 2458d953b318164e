#include "model/cross_quantile.hpp"

#include "backtransform/intervals.hpp"

#include <algorithm>
#include <array>
#include <limits>
#include <utility>

namespace formsieve::model {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// Folds whose places are kept without asking for memory.
constexpr std::size_t kFewFolds = 32;

}  // namespace

CrossQuantile::CrossQuantile(const std::vector<Fold>& folds, double level) {
  std::vector<std::pair<double, std::uint64_t>> pooled;
  for (const Fold& fold : folds) {
    Sorted sorted;
    sorted.values = {-kInfinity};
    sorted.upto = {0};
    for (std::size_t i = 0; i < fold.residuals.size(); ++i) {
      const std::uint64_t count = fold.counts.empty() ? 1 : fold.counts[i];
      sorted.values.push_back(fold.residuals[i]);
      sorted.upto.push_back(sorted.upto.back() + count);
      pooled.emplace_back(fold.residuals[i], count);
    }
    n_ += sorted.upto.back();
    sorted.values.push_back(kInfinity);
    sorted.upto.push_back(sorted.upto.back());
    folds_.push_back(std::move(sorted));
  }
  rank_ = backtransform::upper_rank(n_, level);
  if (!exists()) return;
  std::sort(pooled.begin(), pooled.end());
  std::uint64_t passed = 0;
  for (const auto& [value, count] : pooled) {
    pooled_ = value;
    passed += count;
    if (passed >= rank_) break;
  }
  for (Sorted& sorted : folds_) {
    const auto last = std::upper_bound(sorted.values.begin(), sorted.values.end() - 1, pooled_);
    sorted.start = static_cast<std::size_t>(last - sorted.values.begin()) - 1;
  }
}

double CrossQuantile::at(const double* offsets, std::size_t stride, double sign, double scale) const {
  const std::size_t k = folds_.size();
  std::array<std::size_t, kFewFolds> few;
  std::vector<std::size_t> many(k > kFewFolds ? k : 0);
  std::size_t* const place = k > kFewFolds ? many.data() : few.data();
  const auto value = [&](std::size_t g, std::size_t i) {
    return sign * offsets[g * stride] + scale * folds_[g].values[i];
  };

  double middle = 0.0;
  for (std::size_t g = 0; g < k; ++g) middle += offsets[g * stride];
  const double guess = sign * middle / static_cast<double>(k) + scale * pooled_;
  std::uint64_t passed = 0;
  for (std::size_t g = 0; g < k; ++g) {
    std::size_t i = folds_[g].start;
    while (value(g, i + 1) <= guess) ++i;
    while (value(g, i) > guess) --i;
    place[g] = i;
    passed += folds_[g].upto[i];
  }
  while (passed < rank_) {
    std::size_t next = 0;
    for (std::size_t g = 1; g < k; ++g)
      if (value(g, place[g] + 1) < value(next, place[next] + 1)) next = g;
    const Sorted& fold = folds_[next];
    passed += fold.upto[place[next] + 1] - fold.upto[place[next]];
    ++place[next];
  }
  for (;;) {
    std::size_t top = 0;
    for (std::size_t g = 1; g < k; ++g)
      if (value(g, place[g]) > value(top, place[top])) top = g;
    const Sorted& fold = folds_[top];
    const std::uint64_t here = fold.upto[place[top]] - fold.upto[place[top] - 1];
    if (passed - here < rank_) return value(top, place[top]);
    passed -= here;
    --place[top];
  }
}

}  // namespace formsieve::model

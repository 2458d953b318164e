#include "model/held_out.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

namespace formsieve::model {

namespace {

/// A stretch of ranks, as a share of all, and how many order statistics it gets at most.
struct Stretch {
  double upto;
  std::size_t most;
};

/// From the far end: what a stretch does not use is left to the one before it.
constexpr std::array<Stretch, 3> kStretches = {{{0.9, 101}, {0.99, 800}, {1.0, 100}}};

/// The ranks kept, from 1, rising; the last is n.
std::vector<std::size_t> kept_ranks(std::size_t n) {
  std::array<std::size_t, kStretches.size() + 1> edges = {};
  for (std::size_t s = 0; s < kStretches.size(); ++s)
    edges[s + 1] = static_cast<std::size_t>(std::ceil(kStretches[s].upto * static_cast<double>(n)));
  std::vector<std::size_t> ranks;
  std::size_t spare = 0;
  for (std::size_t s = kStretches.size(); s-- > 0;) {
    const std::size_t length = edges[s + 1] - edges[s];
    const std::size_t wanted = kStretches[s].most + spare;
    const std::size_t kept = std::min(length, wanted);
    spare = wanted - kept;
    for (std::size_t i = 1; i <= kept; ++i) ranks.push_back(edges[s] + (i * length + kept - 1) / kept);
  }
  std::sort(ranks.begin(), ranks.end());
  return ranks;
}

}  // namespace

Fold fold_record(std::vector<double> coefficients, std::vector<double> residuals) {
  Fold fold;
  fold.coefficients = std::move(coefficients);
  if (residuals.size() <= kMostHeldOut) {
    fold.residuals = std::move(residuals);
    return fold;
  }
  std::size_t before = 0;
  for (const std::size_t rank : kept_ranks(residuals.size())) {
    fold.residuals.push_back(residuals[rank - 1]);
    fold.counts.push_back(rank - before);
    before = rank;
  }
  return fold;
}

}  // namespace formsieve::model

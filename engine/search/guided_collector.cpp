#include "search/guided_collector.hpp"

#include "base/random.hpp"

#include <algorithm>
#include <bit>
#include <cmath>

namespace formsieve::search {

namespace {

/// Ertl's σ: x + Σ x^(2^k) 2^(k−1), for a share x < 1 of ranks that are still empty.
double of_empty(double x) {
  double sum = x;
  double last = -1.0;
  for (double factor = 1.0; sum != last; factor *= 2.0) {
    x *= x;
    last = sum;
    sum += x * factor;
  }
  return sum;
}

}  // namespace

bool better(const Found& a, const Found& b) {
  if (a.score != b.score) return a.score < b.score;
  return a.choices < b.choices;
}

void Collector::offer(double score, std::uint64_t hash, const Choices& choices) {
  if (!(score < limit_) || !seen_.insert(hash).second) return;
  found_.push_back({score, choices});
  if (found_.size() >= 2 * keep_) cut();
}

void Collector::cut() {
  const auto kept = found_.begin() + static_cast<std::ptrdiff_t>(keep_);
  std::nth_element(found_.begin(), kept - 1, found_.end(), better);
  limit_ = found_[keep_ - 1].score;
  found_.erase(kept, found_.end());
}

void DistinctCount::add(std::uint64_t hash) {
  const std::uint64_t mixed = base::SplitMix64(hash).next();  // XORs of keys are not independent of each other
  std::uint8_t& rank = rank_[mixed >> (64 - kIndexBits)];
  const std::uint64_t rest = (mixed << kIndexBits) | (std::uint64_t{1} << (kIndexBits - 1));  // ends the run of zeros
  rank = std::max(rank, static_cast<std::uint8_t>(std::countl_zero(rest) + 1));
}

void DistinctCount::join(const DistinctCount& other) {
  for (std::size_t i = 0; i < rank_.size(); ++i) rank_[i] = std::max(rank_[i], other.rank_[i]);
}

double DistinctCount::estimate() const {
  const auto m = static_cast<double>(rank_.size());
  double sum = 0.0;
  double n_empty = 0.0;
  for (const std::uint8_t rank : rank_) {
    if (rank == 0)
      n_empty += 1.0;
    else
      sum += std::ldexp(1.0, -rank);
  }
  if (n_empty == m) return 0.0;
  return m * m / (2.0 * std::log(2.0) * (m * of_empty(n_empty / m) + sum));
}

}  // namespace formsieve::search

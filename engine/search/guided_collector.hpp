// What a worker meets on its way: the best candidates by one objective, and how many different ones there were.
#pragma once

#include "search/guided_space.hpp"

#include <array>
#include <cstddef>
#include <cstdint>
#include <limits>
#include <unordered_set>
#include <vector>

namespace formsieve::search {

/// A candidate as met, with the score of a look: equal to the canonical one to rounding.
struct Found {
  double score = 0.0;
  Choices choices;
};

/// Smaller score first, then smaller candidate number.
bool better(const Found& a, const Found& b);

/// The best of what was offered, each once. Grows to twice what it keeps and is then cut.
class Collector {
 public:
  /// Only candidates with a score below `limit` are wanted.
  Collector(std::size_t keep, double limit) : keep_(keep), limit_(keep == 0 ? 0.0 : limit) {}

  /// A candidate with this score or more need not be offered.
  double limit() const { return limit_; }
  /// `hash`: GuidedSpace::hash; two candidates that share one, out of 2^64, are taken for the same.
  void offer(double score, std::uint64_t hash, const Choices& choices);
  const std::vector<Found>& found() const { return found_; }

 private:
  void cut();

  std::size_t keep_;
  double limit_;
  std::vector<Found> found_;
  std::unordered_set<std::uint64_t> seen_;
};

/// How many different hashes were added, to about 0.8 % (HyperLogLog of Flajolet, Fusy, Gandouet & Meunier 2007, with
/// the estimator of Ertl 2017, which needs no case for small counts). Joining is exact, whatever the order.
class DistinctCount {
 public:
  void add(std::uint64_t hash);
  void join(const DistinctCount& other);
  double estimate() const;

 private:
  static constexpr unsigned kIndexBits = 14;
  std::array<std::uint8_t, std::size_t{1} << kIndexBits> rank_{};
};

}  // namespace formsieve::search

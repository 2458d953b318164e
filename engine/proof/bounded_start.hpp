// A first limit for a bounded walk: candidates that are good already.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "search/subspace_walk.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <stop_token>
#include <vector>

namespace formsieve::proof {

/// Distinct candidates of one response form by cv_sse, the best first: at least `keep` of them where there are as many
/// and some more that lie as near as rounding to the last.
class HeldList {
 public:
  /// `keep` of none counts as one: a limit is wanted all the same.
  explicit HeldList(std::size_t keep) : keep_(keep == 0 ? 1 : keep) {}

  /// Candidates that are not listed; those that are keep their score.
  void add(std::vector<search::Held> found);
  /// cv_sse of the keep-th, +infinity as long as there are fewer.
  double worst() const;
  std::span<const search::Held> entries() const { return entries_; }
  /// What a list that is added need not hold more of.
  std::size_t capacity() const { return keep_ + kTies; }

 private:
  /// Where more candidates than these agree with the keep-th but for rounding, which of them are kept is not defined.
  static constexpr std::size_t kTies = 256;

  std::size_t keep_;
  std::vector<search::Held> entries_;
};

/// What the start of a walk may cost.
struct StartEffort {
  std::uint64_t neighbourhood = 1'000'000;  ///< candidates of a neighbourhood at most
  int most_neighbourhoods = 4;
};

/// Adds the hints of the response form; descends by single changes of cv_sse from the best of them, or from the
/// smallest candidate; then walks the candidates that combine the changes that cost least, anew about the best of
/// these as long as that is another. Returns how many candidates were visited.
std::uint64_t start_list(const search::Space& space, const base::GramSet& grams, std::size_t response,
                         std::span<const search::Choice> hints, const StartEffort& effort, const std::stop_token& stop,
                         HeldList& list);

}  // namespace formsieve::proof

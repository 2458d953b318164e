// Looks at the neighbours of candidates, keeps the best of all that it meets, and names the best changes.
#pragma once

#include "search/guided_collector.hpp"
#include "search/guided_look.hpp"
#include "search/guided_pairs.hpp"

#include <cstddef>
#include <memory>
#include <optional>
#include <span>
#include <vector>

namespace formsieve::search {

class Scout {
 public:
  /// Changes of one look that are named, best first: the first is nearly always good, but the canonical score may find
  /// a candidate inseparable that a look, which eliminates in another order, could just separate.
  static constexpr std::size_t kMostMoves = 4;

  /// The arguments must outlive it. `limit`: [objective] greater scores are not kept; `keep` candidates of each.
  Scout(const GuidedSpace& space, std::span<const Objective> objectives, std::size_t keep,
        std::span<const double> limit);

  /// What may stand in the place of one predictor of a candidate.
  void look_in_place(std::size_t objective, const Choices& candidate, std::size_t predictor);
  /// What may enter, if one more term is admitted.
  void look_for_more(std::size_t objective, const Choices& candidate);
  /// Both, for all predictors of a candidate.
  void look_around(std::size_t objective, const Choices& candidate);
  /// Every choice of two predictors of a candidate.
  void look_at_pair(std::size_t objective, const Choices& candidate, std::size_t first, std::size_t second);
  /// Keeps a candidate whose score is known.
  void meet(std::size_t objective, const Choices& candidate, double score);

  /// The best kMostMoves met since the last call with a score below `below`, best first.
  std::vector<Found> take_moves(double below);

  /// Gives back the memory of the looks; what was found stays.
  void rest();

  const std::vector<Found>& found(std::size_t objective) const { return collectors_[objective].found(); }
  const DistinctCount& distinct() const { return distinct_; }

 private:
  Look& look(std::size_t objective);
  void consider(std::size_t objective, const Extensions& extensions, std::optional<std::size_t> slot);
  /// `choices` is changed and changed back: `base` with a choice of one predictor.
  void consider(std::size_t objective, double score, std::uint64_t hash, Choices& base, std::size_t predictor,
                std::uint16_t choice);
  void propose(double score, const Choices& choices);

  const GuidedSpace& space_;
  std::span<const Objective> objectives_;
  std::vector<std::unique_ptr<Look>> looks_;  ///< [objective] made when first needed
  std::vector<std::unique_ptr<PairLook>> pair_looks_;
  std::vector<Collector> collectors_;
  DistinctCount distinct_;
  std::vector<Found> moves_;
};

}  // namespace formsieve::search

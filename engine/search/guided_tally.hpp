// Where descents ended, and how often independent ones ended there.
#pragma once

#include "search/guided_descent.hpp"

#include <cstddef>
#include <map>
#include <span>
#include <vector>

namespace formsieve::search {

class Tally {
 public:
  explicit Tally(std::size_t n_objectives) : endings_(n_objectives), n_starts_(n_objectives, 0) {}

  /// Records the legs, each with an ending, of one descent. `independent`: its start owed nothing to what was found
  /// before; its first leg then counts.
  void record(std::span<const Leg> legs, bool independent);

  /// Independent descents by an objective that came to an end, and those that ended in a candidate.
  std::size_t n_starts(std::size_t objective) const { return n_starts_[objective]; }
  std::size_t n_ended(std::size_t objective, const Choices& choices) const;

  /// Terms of the largest ending; 0 without one.
  std::size_t most_terms() const { return most_terms_; }
  /// The best endings of an objective, best first, at most `most`.
  std::vector<Choices> best_endings(std::size_t objective, std::size_t most) const;

 private:
  struct Ending {
    double score = 0.0;
    std::size_t n_independent = 0;
  };

  std::vector<std::map<Choices, Ending>> endings_;  ///< [objective]
  std::vector<std::size_t> n_starts_;               ///< [objective]
  std::size_t most_terms_ = 0;
};

}  // namespace formsieve::search

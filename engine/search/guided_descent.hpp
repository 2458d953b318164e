// One descent: from a start to a candidate that no single change, exchange or pair of changes improves.
//
// Passes: predictor by predictor, in random order, the best of everything that may stand in its place (another form,
// another predictor in any form, nothing), and the best that may enter, one after another. After each one look at all
// neighbours, whose eliminations are shared; where that brings nothing, pairs of the predictors present, each in every
// form. Where the score is comparable across
// response forms, the descent then goes on under another response form if the same choices are better there.
#pragma once

#include "base/random.hpp"
#include "search/guided_scout.hpp"

#include <cstddef>
#include <map>
#include <optional>
#include <stop_token>
#include <vector>

namespace formsieve::search {

/// By candidate: where descents by one objective ended that came through it.
using Endings = std::map<Choices, Choices>;

/// What descents share and none changes.
struct DescentSetup {
  const GuidedSpace& space;
  std::vector<Objective> objectives;
  std::vector<bool> comparable;  ///< [objective] whether its scores compare with those of the others so marked
  std::size_t keep = 0;
  std::stop_token stop;
  std::vector<Endings> known;  ///< [objective] a descent stops at these: their ending is its own
  std::vector<double> limit;   ///< [objective] candidates with greater scores are not kept
};

/// A descent under one objective.
struct Leg {
  std::size_t objective = 0;
  std::vector<Choices> path;      ///< candidates passed, the start first
  std::optional<Choices> ending;  ///< none when it was stopped, or had no separable start
  double score = 0.0;             ///< canonical, of the last of the path
  bool known = false;             ///< it met a known candidate, whose further legs were gone already
};

class Descent {
 public:
  Descent(const DescentSetup& setup, Scout& scout, std::uint64_t seed);

  /// Goes down from a start, which is mended where it is inseparable. One leg, and more where other response forms are
  /// better.
  std::vector<Leg> run(std::size_t objective, const Choices& start);

 private:
  bool begin(const Choices& start);
  bool mend(Choices& choices);
  void descend();
  void pass();
  bool enter();
  bool improve_by_one();
  bool improve_by_pair();
  std::optional<std::size_t> better_objective();
  bool take_best();
  void arrive(Choices choices, double score);

  bool stopped() const { return setup_.stop.stop_requested(); }
  bool over() const { return known_ || stopped(); }
  double score_of(std::size_t objective, const Choices& choices) {
    return setup_.objectives[objective].score(setup_.space, choices, fit_);
  }
  /// What a score must be below to be an improvement.
  double bar() const { return score_ - setup_.objectives[objective_].rounding(); }

  const DescentSetup& setup_;
  const GuidedSpace& space_;
  Scout& scout_;
  base::SplitMix64 random_;
  CandidateFit fit_;

  std::size_t objective_ = 0;
  Choices current_;
  double score_ = 0.0;
  bool known_ = false;
  std::vector<Choices> path_;
};

}  // namespace formsieve::search

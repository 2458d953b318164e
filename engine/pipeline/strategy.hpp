// How the space is searched: every candidate, a proof, guided local search, or the last two together.
#pragma once

#include <formsieve/run.hpp>

#include "pipeline/estimate.hpp"
#include "pipeline/prepare.hpp"

#include <string>

namespace formsieve::pipeline {

struct Strategy {
  bool every = false;   ///< score every candidate
  bool proves = false;  ///< the lowest of an information criterion, with proof
  bool guides = false;  ///< the lowest held-out error, by local search
  bool bounds = false;  ///< held-out error on the form's scale with certainty, where a bound leaves little to visit
  std::string name;     ///< "every", "proved", "guided", "proved and guided"
  std::string why;      ///< one sentence
};

/// What the plan asks for, or for "auto" every candidate where that fits the budget, and otherwise the proof together
/// with the guided search. Errors (kind plan): "every" beyond the budget; a proof of predictors with more forms than
/// it can hold.
Result<Strategy> choose_strategy(const Estimate& estimate, const Prepared& prepared, const run::Plan& plan);

}  // namespace formsieve::pipeline

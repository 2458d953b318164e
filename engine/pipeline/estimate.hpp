// The count of the space, the time it will take, and whether the budget allows it.
#pragma once

#include <formsieve/pipeline.hpp>

#include "base/gram.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"
#include "search/walk.hpp"

namespace formsieve::pipeline {

/// The largest space that can be numbered in 64 bits, the limit of strategy "every".
inline const search::BigCount kMostCandidates = search::BigCount(1) << 62;

/// Seconds by calibration on this machine: a short walk over a sample of subtrees, one candidate examined, and one
/// scored from its Gram matrices alone.
struct Estimate {
  search::BigCount candidates;
  double candidates_per_second = 0.0;  ///< with all threads
  double screen_seconds = 0.0;
  double own_units_seconds = 0.0;  ///< pilots, their Gram matrices, and the lists scored again
  double examine_seconds = 0.0;
  double total() const { return screen_seconds + own_units_seconds + examine_seconds; }
};

/// `gram_seconds`: what building `grams` took.
Estimate estimate(const Prepared& prepared, const base::GramSet& grams, const search::WalkOptions& walk,
                  const Examiner& examiner, std::size_t pool, double gram_seconds);

/// Error (kind plan) when the estimate exceeds the budget or the space is beyond what strategy "every" can number; says
/// what to change.
Status check_budget(const Estimate& estimate, const Prepared& prepared, const run::Plan& plan);

/// "5,859,375"
std::string grouped(const search::BigCount& count);
/// "4 s", "12 min", "3.5 h", "2 days"
std::string duration_words(double seconds);

}  // namespace formsieve::pipeline

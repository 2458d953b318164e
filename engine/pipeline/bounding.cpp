#include "pipeline/bounding.hpp"

#include "judge/words.hpp"
#include "pipeline/estimate.hpp"
#include "proof/bounded_estimate.hpp"
#include "proof/problem.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::pipeline {

namespace {

/// Larger spaces are not tried: at best one candidate in a million million is left to visit.
const search::BigCount kMostBounded = search::BigCount(1'000'000'000) * 1'000'000'000;

/// The estimate must fit this many times, since dives may miss the dear parts of the tree.
constexpr double kSafety = 2.0;

/// Parts of a thousand in which the share done with is told.
constexpr double kSteps = 1000.0;

proof::HeldOutRows held_out_rows(const Prepared& prepared) {
  const auto& weights = prepared.data.weights;
  return {prepared.folds.repeats, weights.empty() ? 1.0 : *std::max_element(weights.begin(), weights.end())};
}

bool can_be_tried(const Prepared& prepared) {
  return search::count(prepared.space) <= kMostBounded &&
         std::all_of(prepared.space.predictors.begin(), prepared.space.predictors.end(),
                     [](const auto& predictor) { return predictor.forms.size() <= proof::kMostForms; });
}

/// Seconds of the walk and of the trees, all threads.
double seconds_of(const std::vector<proof::VisitEstimate>& estimates, double candidates_per_second) {
  double seconds = 0.0;
  for (const auto& one : estimates)
    seconds += (one.visits + one.standard_error) / candidates_per_second + one.nodes * one.node_seconds;
  return seconds;
}

std::string list_words(std::size_t keep) {
  return "the " + judge::grouped_digits(std::to_string(keep)) +
         " best of each response form by held-out error on its scale";
}

std::string walked_words(const proof::BoundedWalk& walk, std::size_t keep) {
  std::uint64_t scored = 0;
  search::BigCount cut = 0, open = 0;
  for (const auto& counts : walk.counts) {
    scored += counts.n_scored;
    cut += counts.n_cut;
    open += counts.n_open;
  }
  const std::string numbers = judge::grouped_digits(std::to_string(scored)) +
                              " candidates were scored, and a bound on " + "their residual sum of squares ruled out " +
                              grouped(cut);
  if (walk.complete) return "Certain are " + list_words(keep) + ": " + numbers + " unseen";
  return "Not certain are " + list_words(keep) + ": " + numbers + "; " + grouped(open) +
         " were not reached when the time was up";
}

}  // namespace

Bounded bound_and_walk(const Prepared& prepared, const base::GramSet& grams, const BoundingLimits& limits,
                       const std::vector<search::Choice>& hints, Meter& meter) {
  Bounded result;
  if (!can_be_tried(prepared)) return result;
  proof::BoundedWalkOptions options;
  options.keep = limits.keep;
  options.threads = limits.threads;
  options.stop = meter.token();
  const double start = meter.seconds();
  meter.begin("estimating what a bound leaves", 0.0, "");
  proof::EstimateEffort effort;
  effort.seconds = [&meter] { return meter.seconds(); };
  const auto estimates = proof::estimate_visits(prepared.space, grams, held_out_rows(prepared), options, effort, hints);
  const double seconds = kSafety * seconds_of(estimates, limits.candidates_per_second);
  const double end = start + limits.seconds;
  if (!(meter.seconds() + seconds <= end)) {
    result.words = "Not certain are " + list_words(limits.keep) +
                   ": to visit what a bound leaves would take more than its share of the budget "
                   "(a 300th part)";
    return result;
  }
  meter.begin("visiting what a bound leaves", kSteps, "thousandths");
  options.enough = [&meter, end] { return meter.seconds() >= end; };
  double told = 0.0;
  options.progress = [&](double share) {
    const double done = std::floor(kSteps * share);
    if (done > told) meter.add(static_cast<std::uint64_t>(done - told));
    told = std::max(told, done);
  };
  result.walk = proof::bounded_walk(prepared.space, grams, held_out_rows(prepared), options, hints);
  meter.end();
  result.words = walked_words(*result.walk, limits.keep);
  return result;
}

}  // namespace formsieve::pipeline

#include "pipeline/estimate.hpp"

#include "base/parallel.hpp"
#include "judge/words.hpp"
#include "pipeline/pilot.hpp"
#include "search/candidate_fit.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>

namespace formsieve::pipeline {

namespace {

/// Long enough for a rate within some ten per cent, short enough not to be felt.
constexpr double kCalibrationSeconds = 0.15;

/// Spaces up to this size need no calibration: they take well under a second on any machine.
constexpr std::uint64_t kSmallSpace = 100'000;

/// Assumed rate for small spaces, only for the sentence that announces the run; slower than any machine of the last ten
/// years.
constexpr double kCautiousRate = 1e6;

/// Candidates that the lists of a calibration keep: in its short walk longer ones would not fill, and every candidate
/// would be taken in, which hardly happens in a long one.
constexpr std::size_t kCalibrationKeep = 100;

/// Seconds that one candidate taken into a long list costs, about what was measured on a busy machine.
constexpr double kSecondsPerEntry = 1e-6;

/// Moves of a descent: about as many as good candidates have terms, each looking at every form.
constexpr double kDescentMoves = 10.0;

/// A candidate of about half the predictors, each in its first form: what a pooled candidate costs.
search::Choice probe(const search::Space& space) {
  search::Choice choice;
  choice.choice.assign(space.predictors.size(), 0);
  const std::size_t most =
      std::min(space.max_terms.value_or(space.predictors.size()), (space.predictors.size() + 1) / 2);
  std::size_t present = 0;
  for (std::size_t j = 0; j < space.predictors.size(); ++j)
    if (space.predictors[j].always) choice.choice[j] = 1, ++present;
  for (std::size_t j = 0; j < space.predictors.size() && present < most; ++j)
    if (choice.choice[j] == 0) choice.choice[j] = 1, ++present;
  return choice;
}

double seconds_of_one(const Prepared& prepared, const Examiner& examiner) {
  const auto start = std::chrono::steady_clock::now();
  (void)examiner.score(probe(prepared.space), 0);
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

/// Seconds to score one candidate from its Gram matrices.
double seconds_of_scoring(const Prepared& prepared, const base::GramSet& grams) {
  constexpr int kTimes = 20;
  search::CandidateFit fit;
  std::vector<std::size_t> columns;
  search::columns_of(prepared.space, probe(prepared.space).choice, columns);
  const auto start = std::chrono::steady_clock::now();
  for (int i = 0; i < kTimes; ++i) (void)search::cv_sse_of(grams, columns, 0, fit);
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count() / kTimes;
}

/// Candidates that enter a list of `keep` when `candidates` come in random order: the i-th with probability keep / i.
double entries(double candidates, double keep) {
  if (candidates <= keep) return candidates;
  return keep * (1.0 + std::log(candidates / keep));
}

/// Seconds of the walk's lists beyond what the calibration saw, were they filled by one thread.
double seconds_of_lists(const search::WalkOptions& walk, double candidates_each, std::size_t n_responses) {
  double total = 0.0;
  for (const auto& rule : walk.rules) total += entries(candidates_each, static_cast<double>(rule.keep));
  return total * static_cast<double>(n_responses) * kSecondsPerEntry;
}

/// What the own-units screen needs on one thread, the Gram matrices apart.
double seconds_of_own_units(const Prepared& prepared, const base::GramSet& grams, const search::WalkOptions& walk,
                            double candidates_each, double seconds_of_one_examined) {
  double n_forms = 0.0;
  for (const auto& predictor : prepared.space.predictors) n_forms += static_cast<double>(predictor.forms.size());
  double scored = kDescentMoves * n_forms;
  for (const auto& rule : walk.rules) scored += std::min(candidates_each, static_cast<double>(rule.keep));
  return scored * seconds_of_scoring(prepared, grams) + static_cast<double>(kPilotCandidates) * seconds_of_one_examined;
}

/// The largest max_terms whose space fits into `most` candidates, if any is smaller than the present one.
std::optional<std::size_t> fitting_terms(const search::Space& space, const search::BigCount& most) {
  search::BigCount total = 0;
  std::optional<std::size_t> fitting;
  const auto by_terms = search::count_by_terms(space);
  for (std::size_t k = 0; k < by_terms.size(); ++k) {
    total += by_terms[k];
    if (total > most) break;
    if (by_terms[k] > 0) fitting = k;
  }
  return fitting;
}

std::string what_to_change(const Estimate& estimate, const Prepared& prepared, double budget_seconds) {
  const double affordable =
      std::max(1.0, estimate.candidates_per_second *
                        std::max(1.0, budget_seconds - estimate.own_units_seconds - estimate.examine_seconds));
  const auto most = std::min(kMostCandidates, search::BigCount(affordable));
  std::string hint;
  if (const auto terms = fitting_terms(prepared.space, most); terms && *terms > 0)
    hint = "search.max_terms = " + std::to_string(*terms) + " (--max-terms " + std::to_string(*terms) + ") fits; ";
  return hint +
         "so would fewer forms in the longest menus (forms.of), fewer predictors (data.ignore), or a larger "
         "search.budget (--budget)";
}

}  // namespace

std::string grouped(const search::BigCount& count) { return judge::grouped_digits(count.str()); }

std::string duration_words(double seconds) {
  char text[64];
  if (!(seconds < 3.15e13)) return "millions of years";
  if (seconds < 1.0) return "less than a second";
  if (seconds < 90.0)
    std::snprintf(text, sizeof text, "%.0f s", seconds);
  else if (seconds < 5400.0)
    std::snprintf(text, sizeof text, "%.0f min", seconds / 60.0);
  else if (seconds < 48.0 * 3600.0)
    std::snprintf(text, sizeof text, "%.1f h", seconds / 3600.0);
  else if (seconds < 3.15e7 * 3.0)
    std::snprintf(text, sizeof text, "%.0f days", seconds / 86400.0);
  else
    std::snprintf(text, sizeof text, "%.2g years", seconds / 3.15e7);
  return text;
}

Estimate estimate(const Prepared& prepared, const base::GramSet& grams, const search::WalkOptions& walk,
                  const Examiner& examiner, std::size_t pool, double gram_seconds) {
  Estimate result;
  result.candidates = search::count(prepared.space);
  const double threads = walk.threads == 0 ? base::available_threads() : walk.threads;
  search::WalkOptions short_lists = walk;
  for (auto& rule : short_lists.rules) rule.keep = std::min(rule.keep, kCalibrationKeep);
  result.candidates_per_second = kCautiousRate;
  if (result.candidates > kSmallSpace)
    result.candidates_per_second = threads * search::calibrate(prepared.space, grams, short_lists, kCalibrationSeconds);
  const double candidates = result.candidates.convert_to<double>();
  const std::size_t n_responses = prepared.data.response_forms.size();
  const double candidates_each = candidates / static_cast<double>(n_responses);
  result.screen_seconds =
      candidates / result.candidates_per_second + seconds_of_lists(walk, candidates_each, n_responses) / threads;
  const double one = seconds_of_one(prepared, examiner);
  for (const auto& form : prepared.data.response_forms)
    if (!is_linear(form))
      result.own_units_seconds +=
          gram_seconds + seconds_of_own_units(prepared, grams, walk, candidates_each, one) / threads;
  result.examine_seconds = one * std::min(candidates, static_cast<double>(pool)) / threads;
  return result;
}

Status check_budget(const Estimate& estimate, const Prepared& prepared, const run::Plan& plan) {
  if (estimate.candidates <= kMostCandidates && estimate.total() <= plan.search.budget_seconds) return {};
  char rate[32];
  std::snprintf(rate, sizeof rate, "%.3g", estimate.candidates_per_second);
  return Error{ErrorKind::plan,
               "the space holds " + grouped(estimate.candidates) + " candidates, which would take about " +
                   duration_words(estimate.total()) + " here (" + rate + " candidates a second); the budget is " +
                   duration_words(plan.search.budget_seconds),
               where_in_plan(plan, "search.budget"), what_to_change(estimate, prepared, plan.search.budget_seconds)};
}

}  // namespace formsieve::pipeline

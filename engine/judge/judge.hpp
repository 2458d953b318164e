// Room judge: scores, ranking, named lines. Knows nothing of output formats. May call: base and the result types of
// fit, checks, backtransform.
#pragma once

#include <formsieve/judge.hpp>

#include <cstddef>
#include <cstdint>
#include <functional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::judge {

/// Held-out predictions of one candidate. Flattened repeats × rows: entry r·n + i belongs to row i in repeat r.
struct HeldOut {
  std::span<const double> measured_own;                 ///< [n]
  std::span<const double> measured_form;                ///< [n]
  std::span<const double> mean_own;                     ///< [repeats · n] smeared; NaN where undefined
  std::span<const double> naive_own;                    ///< [repeats · n]
  std::span<const double> predicted_form;               ///< [repeats · n]
  std::vector<std::span<const std::uint32_t>> fold_of;  ///< [repeats][n]
  std::size_t n_folds = 0;                              ///< in each repeat
};
/// CV RMSE pooled over all held-out rows, its standard error by the delta method from the fold-wise mean squared
/// errors, bias, median absolute error, naive figure, and the same on the form's scale (design.md, "CV RMSE").
CrossValidation cross_validation(const HeldOut& held_out);

/// Value of the plan's criterion; +infinity where it is unset (such candidates rank last).
double criterion_value(const Candidate& candidate, Criterion criterion);

/// Sorts by the criterion, ties by candidate number (as a number), sets ranks, and marks the best, the recommended
/// (lowest AIC among own-units CV within near_tie of the best), the simplest within one standard error of the best CV
/// (fewest coefficients, then lowest CV), and the lowest AIC. Returns sentences about picks that differ (best by AIC
/// with another response form than the best by CV, …).
std::vector<std::string> rank(std::vector<Candidate>& candidates, Criterion criterion, double near_tie);

/// Whether the candidate at this place of a ranked list may carry a name; asked of as few as the names need.
using Admits = std::function<bool(std::size_t)>;

/// The two halves of `rank`: order and ranks, without marks …
void put_in_order(std::vector<Candidate>& candidates, Criterion criterion);
/// … then marks, given only to candidates that `admits` says yes to (empty: to all), and the sentences.
std::vector<std::string> name_lines(std::vector<Candidate>& ranked, Criterion criterion, double near_tie,
                                    const Admits& admits);

/// The cautions printed once per result.
std::vector<std::string> general_cautions(const Shortlist& shortlist);
/// Cautions of one candidate: failed checks, poor R², smearing factor far from 1, undefined predictions, few rows for a
/// search …
std::vector<std::string> candidate_cautions(const Candidate& candidate);

/// What may mend a check of `candidate` that is strained or broken: the best-ranked of `listed` [by rank, examined in
/// full] for which it holds with another response form or another form of the term in question, and what that costs in
/// cross-validated error; where there is none, what is usually done. Empty where the check holds or was not made. Cost
/// O(listed).
std::vector<std::string> mends(const Candidate& candidate, const checks::Check& check,
                               std::span<const Candidate> listed);

}  // namespace formsieve::judge

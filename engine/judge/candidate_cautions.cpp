#include "judge/judge.hpp"

#include "judge/picks.hpp"
#include "judge/words.hpp"

#include <cmath>

namespace formsieve::judge {

namespace {

/// A correction of the mean by less than this is smaller than most fold noise.
constexpr double kNotableCorrection = 0.1;
/// Beyond this the mean rests on the tail of the residuals: few of them decide it.
constexpr double kStrongCorrection = 0.5;
/// Common practice: at least ten rows for each coefficient.
constexpr double kRowsPerCoefficient = 10.0;
/// Share of the variation below which an equation is of little use for single rows.
constexpr double kWeakR2 = 0.25;
/// Held-out bias is mentioned beyond this share of the RMSE (its square is 1 % of the MSE) if it also exceeds two of
/// its standard errors.
constexpr double kNotableBias = 0.1;

using Sentences = std::vector<std::string>;

std::string p_words(double p) {
  constexpr double kSmallest = 1e-4;
  return p < kSmallest ? "p below 0.0001" : "p " + number_words(p);
}

void say_failed_checks(const Candidate& candidate, Sentences& said) {
  for (const auto& check : candidate.checks) {
    if (check.passes) continue;
    std::string sentence = capitalised(check.name) + " fails: " + check.size_words;
    if (check.p_adjusted) sentence += " (" + p_words(*check.p_adjusted) + " after adjustment)";
    if (!check.note.empty()) sentence += "; " + check.note;
    said.push_back(sentence + ".");
  }
}

void say_undefined(const Candidate& candidate, Sentences& said) {
  const std::size_t count = candidate.cv.n_undefined;
  if (count == 0) return;
  said.push_back(
      counted(count, "held-out prediction") + (count == 1 ? " is" : " are") +
      " undefined in own units, so there is no cross-validated error: the equation leaves the range in which "
      "the response can be turned back.");
}

void say_correction(const Candidate& candidate, Sentences& said) {
  const double factor = candidate.back.smearing_factor;
  if (!std::isfinite(factor) || std::abs(factor - 1.0) <= kNotableCorrection) return;
  std::string sentence = factor > 1.0
                             ? "Without the bias correction predictions would be too low on average: the mean is " +
                                   number_words(factor) + " times the uncorrected value, which estimates a median"
                             : "Without the bias correction predictions would be too high on average: the mean is " +
                                   number_words(factor) + " times the uncorrected value";
  if (std::abs(factor - 1.0) > kStrongCorrection) sentence += "; so strong a correction rests on a few large residuals";
  said.push_back(sentence + ".");
}

void say_few_rows(const Candidate& candidate, Sentences& said) {
  const double rows = static_cast<double>(candidate.n);
  const double parameters = static_cast<double>(candidate.likelihood.n_parameters);
  const double coefficients = static_cast<double>(n_coefficients(candidate));
  if (rows <= parameters + 1.0)
    said.push_back(counted(candidate.n, "row") + " for " + counted(candidate.likelihood.n_parameters, "parameter") +
                   ": AICc is infinite and the fit cannot be judged.");
  else if (coefficients > 0.0 && rows < kRowsPerCoefficient * coefficients)
    said.push_back(counted(candidate.n, "row") + " for " + counted(n_coefficients(candidate), "coefficient") +
                   ", fewer than ten for each (common practice): the coefficients are unsteady.");
}

void say_weak(const Candidate& candidate, Sentences& said) {
  if (!candidate.r2_own_units) {
    if (candidate.cv.n_undefined == 0)
      said.emplace_back(
          "Some of the rows in use have no predicted mean in own units, so R² in own units is not given.");
    return;
  }
  const double r2 = *candidate.r2_own_units;
  if (r2 < 0.0)
    said.emplace_back("In own units the predictions are worse than the plain mean of the response (R² below 0).");
  else if (r2 < kWeakR2)
    said.push_back("It explains " + percent_words(r2) +
                   " of the variation in own units: useful for means of many rows, "
                   "not for single ones.");
}

void say_bias(const Candidate& candidate, Sentences& said) {
  if (!candidate.cv.rmse || !candidate.cv.bias || candidate.n == 0) return;
  const double standard_error = *candidate.cv.rmse / std::sqrt(static_cast<double>(candidate.n));
  const double size = std::abs(*candidate.cv.bias);
  if (size <= kNotableBias * *candidate.cv.rmse || size <= 2.0 * standard_error) return;
  said.push_back("Held-out predictions are too " + std::string(*candidate.cv.bias > 0.0 ? "high" : "low") + " by " +
                 number_words(size) + " on average, " + percent_words(size / *candidate.cv.rmse) +
                 " of the cross-validated error.");
}

/// "fill_percent must stay below 101" where a reflection or shift leaves new rows that cannot be scored.
void say_edges(const Candidate& candidate, Sentences& said) {
  for (std::size_t j = 0; j < candidate.terms.size() && j < candidate.ranges.size(); ++j) {
    const forms::Form& form = candidate.terms[j].form;
    const ValidRange& range = candidate.ranges[j];
    if (!form.reflect && form.shift == 0.0) continue;
    const std::string start = "A new row can be scored only if " + range.column + " is ";
    if (std::isfinite(range.defined.upper) && form.reflect)
      said.push_back(start + (range.defined.upper_closed ? "at most " : "below ") + exact_words(range.defined.upper) +
                     ": the largest seen was " + exact_words(range.seen_max) + ".");
    else if (std::isfinite(range.defined.lower) && !form.reflect)
      said.push_back(start + (range.defined.lower_closed ? "at least " : "above ") + exact_words(range.defined.lower) +
                     ": the smallest seen was " + exact_words(range.seen_min) + ".");
  }
}

}  // namespace

std::vector<std::string> candidate_cautions(const Candidate& candidate) {
  Sentences said;
  say_undefined(candidate, said);
  say_failed_checks(candidate, said);
  say_few_rows(candidate, said);
  say_correction(candidate, said);
  say_bias(candidate, said);
  say_weak(candidate, said);
  say_edges(candidate, said);
  return said;
}

}  // namespace formsieve::judge

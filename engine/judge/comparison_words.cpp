// What the figures of a comparison come to, in plain sentences.
#include "judge/comparison.hpp"

#include "judge/selection.hpp"
#include "judge/words.hpp"

#include <cmath>

namespace formsieve::judge {

namespace {

/// Standard errors of a mean within which a bias is what chance alone leaves.
constexpr double kChance = 2.0;

std::string verdict_of(bool beyond_noise, const std::string& beyond, const std::string& within) {
  return beyond_noise ? beyond : within;
}

std::string with_se(double value, const std::optional<double>& se) {
  return number_words(std::abs(value)) + (se ? " ± " + number_words(*se) : std::string());
}

std::string p_words(double p) { return p < 0.001 ? "p below 0.001" : "p " + number_words(p); }

bool rejects(const std::optional<double>& p) { return p && *p < 1.0 - kNoise; }

std::string nested_words(const LikelihoodDifference& likelihood, const std::string& small, const std::string& large) {
  const std::string lead = small + " is " + large + " with less in it";
  if (!likelihood.f) return lead + "; no residual is left to test the difference by.";
  const std::string figures = ": F " + number_words(*likelihood.f) + " on " + number_words(*likelihood.df) + " and " +
                              number_words(*likelihood.df2) + " degrees of freedom, " + p_words(*likelihood.p_f);
  return lead + figures + ". What " + large + " adds is " +
         verdict_of(likelihood.beyond_noise, "more than noise in the rows in use.", "no more than noise.");
}

std::string z_words(double z, double p) { return "z " + number_words(std::abs(z)) + ", " + p_words(p); }

std::string vuong_words(const LikelihoodDifference& likelihood, const std::string& first, const std::string& second) {
  if (!likelihood.z_bic) return "The likelihoods of " + first + " and " + second + " cannot be compared row by row.";
  const std::string& by_rows = *likelihood.z >= 0.0 ? second : first;
  const std::string& by_bic = *likelihood.z_bic >= 0.0 ? second : first;
  const std::string plain = "Vuong " + z_words(*likelihood.z, *likelihood.p);
  const std::string corrected = z_words(*likelihood.z_bic, *likelihood.p_bic) + " less the BIC penalty";
  if (likelihood.beyond_noise)
    return "Row by row the likelihood speaks for " + by_rows + " (" + plain + "; " + corrected +
           "): more than noise between rows.";
  if (rejects(likelihood.p))
    return "Row by row the likelihood speaks for " + by_rows + " (" + plain +
           "), but not beyond what its coefficients cost (" + corrected + "): no more than noise between rows.";
  const std::string within = "Row by row the likelihoods of " + first + " and " + second +
                             " differ by no more than noise between rows (" + plain + ")";
  if (!rejects(likelihood.p_bic)) return within + ", with the BIC penalty too (" + corrected + ").";
  return within + "; what speaks for " + by_bic + " is its smaller number of coefficients alone (" + corrected + ").";
}

}  // namespace

void put_in_words(FoldDifference& folds, const std::string& first, const std::string& second) {
  if (!folds.mse) {
    folds.words = "The folds of " + first + " and " + second + " have no errors in common.";
  } else if (*folds.mse == 0.0 && !folds.t) {
    folds.words = "The held-out errors of " + first + " and " + second + " are the same in every fold.";
  } else {
    const double difference = folds.rmse.value_or(*folds.mse);
    const bool higher = difference > 0.0;
    const std::string what = folds.rmse ? "CV RMSE" : "mean squared error of the common folds";
    folds.words = second + " has a " + (higher ? "higher " : "lower ") + what + ", by " +
                  with_se(difference, folds.rmse ? folds.rmse_se : folds.mse_se) + "; it is the better one in " +
                  std::to_string(folds.n_second_lower) + " of " + counted(folds.n_folds, "fold") + ". That is " +
                  verdict_of(folds.beyond_noise, "more than fold noise.", "no more than fold noise.");
  }
  folds.words = capitalised(folds.words);
}

void put_in_words(LikelihoodDifference& likelihood, const std::string& first, const std::string& second) {
  switch (likelihood.nesting) {
    case Nesting::same:
      likelihood.words = first + " and " + second + " are one fit: their columns span the same space.";
      break;
    case Nesting::first_in_second:
      likelihood.words = nested_words(likelihood, first, second);
      break;
    case Nesting::second_in_first:
      likelihood.words = nested_words(likelihood, second, first);
      break;
    case Nesting::none:
      likelihood.words = vuong_words(likelihood, first, second);
  }
  likelihood.words = capitalised(likelihood.words);
}

void put_in_words(LinearLogTest& test, const std::string& first, const std::string& second) {
  const std::string& linear = test.first_is_linear ? first : second;
  const std::string& logarithmic = test.first_is_linear ? second : first;
  if (!test.p_linear || !test.p_log) {
    test.words = "The linear " + linear + " cannot be tested against the log-linear " + logarithmic +
                 ": a linear prediction is not positive, or the added column cannot be told from the others.";
    return;
  }
  const bool against_linear = rejects(test.p_linear), against_log = rejects(test.p_log);
  test.words = "Supposing the linear " + linear + ", what " + logarithmic + " says besides is " +
               verdict_of(against_linear, "more than noise", "no more than noise") + "; supposing the log-linear " +
               logarithmic + ", what " + linear + " says besides is " +
               verdict_of(against_log, "more than noise", "no more than noise") + ". ";
  if (against_linear == against_log)
    test.words +=
        against_log ? "Neither form stands: look for a third response form." : "These rows do not tell the two apart.";
  else
    test.words += "That speaks for " + (against_linear ? logarithmic : linear) + ".";
}

void put_in_words(Disagreement& disagreement, const std::string& first, const std::string& second) {
  const bool alike = disagreement.root_mean_square_rel && *disagreement.root_mean_square_rel < kAlikeShare;
  std::string words =
      "On a typical row (root mean square) they are " + number_words(disagreement.root_mean_square_own) + " apart";
  if (disagreement.root_mean_square_rel)
    words +=
        ", " + number_words(*disagreement.root_mean_square_rel) + " CV RMSE" + (alike ? ": nearly one answer" : "");
  words += "; most on line " + grouped_digits(std::to_string(disagreement.line)) + ", " +
           number_words(disagreement.first_own) + " by " + first + " against " + number_words(disagreement.second_own) +
           " by " + second;
  if (disagreement.difference_rel) words += ", " + number_words(std::abs(*disagreement.difference_rel)) + " CV RMSE";
  words += "; measured is " + number_words(disagreement.measured_own) + ".";
  disagreement.words = words;
}

RemainingBias remaining_bias(const Candidate& candidate) {
  RemainingBias result;
  result.correction = candidate.back.used;
  result.bias = candidate.cv.bias;
  for (const auto& correction : candidate.back.corrections)
    if (correction.method == candidate.back.used && correction.cv_bias) result.bias = correction.cv_bias;
  if (!result.bias || !candidate.cv.rmse || !(*candidate.cv.rmse > 0.0)) {
    result.words = "no held-out bias is known";
    return result;
  }
  result.bias_rel = *result.bias / *candidate.cv.rmse;
  const double chance = kChance * *candidate.cv.rmse / std::sqrt(static_cast<double>(candidate.n));
  result.words = "predicts " + number_words(std::abs(*result.bias)) + " too " +
                 (*result.bias > 0.0 ? "much" : "little") + " on average, " +
                 percent_words(std::abs(*result.bias_rel)) + " of its CV RMSE: " +
                 verdict_of(std::abs(*result.bias) > chance, "more than chance leaves", "no more than chance leaves") +
                 " (± " + number_words(chance) + ")";
  return result;
}

}  // namespace formsieve::judge

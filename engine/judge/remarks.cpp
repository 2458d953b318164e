#include "judge/picks.hpp"

#include "judge/words.hpp"

#include <formsieve/forms.hpp>

#include <algorithm>
#include <cmath>

namespace formsieve::judge {

namespace {

/// AIC units within which candidates are held not to be told apart: 2 and 4 (simulation: honesty of a search, within 4
/// a true form is kept in 97 % of data sets).
constexpr double kCloseAic = 2.0;
constexpr double kNearAic = 4.0;

std::string rank_words(const Candidate& candidate) { return "rank " + grouped_digits(std::to_string(candidate.rank)); }

std::string response_words(const Candidate& candidate) {
  return forms::label(candidate.response, candidate.response_column);
}

std::string excess_words(const Candidate& candidate, const Candidate& lowest) {
  if (*candidate.cv.rmse == *lowest.cv.rmse) return "equal to the lowest";
  return percent_words(*candidate.cv.rmse / *lowest.cv.rmse - 1.0) + " above the lowest";
}

void say_when_responses_differ(std::span<const Candidate> ranked, const Picks& picks, std::vector<std::string>& said) {
  if (!picks.lowest_aic || !picks.lowest_cv) return;
  const Candidate& by_aic = ranked[*picks.lowest_aic];
  const Candidate& by_cv = ranked[*picks.lowest_cv];
  if (by_aic.response == by_cv.response) return;
  said.push_back("The lowest AIC (" + rank_words(by_aic) + ") has " + response_words(by_aic) +
                 " as its response, the lowest cross-validated error (" + rank_words(by_cv) + ") has " +
                 response_words(by_cv) +
                 ". AIC judges the law of the errors as well as the curve; the cross-validated error judges distances "
                 "in own units only, and a few large rows weigh most in it.");
  said.push_back(
      "Where one response form gives errors of equal spread, AIC is the better judge of the two; where none does, it "
      "can "
      "prefer worse predictions. Compare equal-spread and normal-residuals of both candidates before choosing.");
}

void say_recommended(std::span<const Candidate> ranked, const Picks& picks, double near_tie,
                     std::vector<std::string>& said) {
  if (!picks.recommended || picks.recommended == picks.lowest_cv) return;
  const Candidate& recommended = ranked[*picks.recommended];
  const Candidate& lowest = ranked[*picks.lowest_cv];
  const double gain = lowest.likelihood.aic - recommended.likelihood.aic;
  said.push_back("Recommended is " + rank_words(recommended) + ": its cross-validated error is " +
                 excess_words(recommended, lowest) + ", a near tie (within " + percent_words(near_tie) +
                 "), and its AIC is " + (std::isfinite(gain) ? number_words(gain) + " " : std::string()) + "lower.");
}

void say_simplest(std::span<const Candidate> ranked, const Picks& picks, std::vector<std::string>& said) {
  if (!picks.simplest || picks.simplest == picks.lowest_cv) return;
  const Candidate& simplest = ranked[*picks.simplest];
  const Candidate& lowest = ranked[*picks.lowest_cv];
  said.push_back("Simplest within one standard error is " + rank_words(simplest) + ": " +
                 counted(n_coefficients(simplest), "coefficient") + " against " +
                 std::to_string(n_coefficients(lowest)) + ", cross-validated error " + excess_words(simplest, lowest) +
                 "; one standard error is " + percent_words(lowest.cv.rmse_se.value_or(0.0) / *lowest.cv.rmse) + ".");
}

void say_near_ties(std::span<const Candidate> ranked, const Picks& picks, double near_tie,
                   std::vector<std::string>& said) {
  if (!picks.lowest_cv || !picks.lowest_aic || ranked.size() < 2) return;
  // of all examined, also where gates keep the lowest from being named
  double lowest_cv = *ranked[*picks.lowest_cv].cv.rmse;
  double lowest_aic = ranked[*picks.lowest_aic].likelihood.aic;
  for (const Candidate& one : ranked) {
    lowest_cv = std::min(lowest_cv, one.cv.rmse.value_or(lowest_cv));
    lowest_aic = std::min(lowest_aic, one.likelihood.aic);
  }
  const double near = lowest_cv * (1.0 + near_tie);
  const auto count = [&](auto within) { return std::count_if(ranked.begin(), ranked.end(), within); };
  const auto by_cv = count([&](const Candidate& one) { return one.cv.rmse && *one.cv.rmse <= near; });
  const auto close = count([&](const Candidate& one) { return one.likelihood.aic <= lowest_aic + kCloseAic; });
  const auto within = count([&](const Candidate& one) { return one.likelihood.aic <= lowest_aic + kNearAic; });
  const auto digits = [](auto number) { return grouped_digits(std::to_string(number)); };
  said.push_back("Of " + counted(ranked.size(), "examined candidate") + ", " + digits(by_cv) + " lie within " +
                 percent_words(near_tie) + " of the lowest cross-validated error, " + digits(close) + " within 2 and " +
                 digits(within) + " within 4 units of the lowest AIC, the lowest itself counted.");
}

void say_undefined(std::span<const Candidate> ranked, const Picks& picks, std::vector<std::string>& said) {
  const auto count = static_cast<std::size_t>(
      std::count_if(ranked.begin(), ranked.end(), [](const Candidate& one) { return !one.cv.rmse; }));
  if (count == 0) return;
  said.push_back(grouped_digits(std::to_string(count)) + " of " + counted(ranked.size(), "examined candidate") +
                 (count == 1 ? " has" : " have") +
                 " no cross-validated error in own units, since a held-out prediction is undefined; by that criterion "
                 "they rank last.");
  if (picks.lowest_aic && !ranked[*picks.lowest_aic].cv.rmse)
    said.push_back("The lowest AIC (" + rank_words(ranked[*picks.lowest_aic]) + ") belongs to one of them.");
}

}  // namespace

std::vector<std::string> remarks(std::span<const Candidate> ranked, const Picks& picks, double near_tie) {
  std::vector<std::string> said;
  if (ranked.empty()) return {"No candidate was left to rank."};
  say_recommended(ranked, picks, near_tie, said);
  say_simplest(ranked, picks, said);
  say_when_responses_differ(ranked, picks, said);
  say_near_ties(ranked, picks, near_tie, said);
  say_undefined(ranked, picks, said);
  return said;
}

}  // namespace formsieve::judge

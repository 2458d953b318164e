// What may mend a check that does not hold: looked for among the other candidates that were examined in full, since a
// form that mends one assumption is already among them or was not good enough to be.
#include "judge/judge.hpp"

#include "judge/words.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

namespace formsieve::judge {

namespace {

using checks::Check;
using checks::Verdict;

/// Candidates named for one check at most: more would be a second shortlist.
constexpr std::size_t kMostNamed = 2;

bool starts_with(const std::string& name, const char* start) { return name.rfind(start, 0) == 0; }

const Check* check_of(const Candidate& candidate, const std::string& name) {
  const auto found = std::find_if(candidate.checks.begin(), candidate.checks.end(),
                                  [&](const Check& check) { return check.name == name; });
  return found == candidate.checks.end() ? nullptr : &*found;
}

bool holds_there(const Candidate& other, const std::string& name) {
  const Check* check = check_of(other, name);
  return check != nullptr && check->verdict == Verdict::holds;
}

const forms::Form* form_in(const Candidate& candidate, const std::string& column) {
  for (const Term& term : candidate.terms)
    if (term.column == column) return &term.form;
  return nullptr;
}

/// The term that the check complains of most; unset where it does not look at terms.
const Term* worst_term(const Candidate& candidate, const Check& check) {
  const auto worst = std::min_element(check.parts.begin(), check.parts.end(), [](const auto& a, const auto& b) {
    return a.p.value_or(1.0) < b.p.value_or(1.0);
  });
  if (worst == check.parts.end()) return nullptr;
  for (const Term& term : candidate.terms)
    if (forms::term_name(term.form, term.column) == worst->subject) return &term;
  return nullptr;
}

/// What `other` does otherwise, the response first; empty when it differs in more than a sentence can hold.
std::string difference(const Candidate& candidate, const Candidate& other, const Check& check) {
  if (other.response != candidate.response)
    return "the response as " + forms::term_name(other.response, other.response_column);
  if (const Term* term = worst_term(candidate, check)) {
    const forms::Form* there = form_in(other, term->column);
    if (there == nullptr) return "without " + term->column;
    if (*there != term->form)
      return forms::term_name(*there, term->column) + " for " + forms::term_name(term->form, term->column);
  }
  return "";
}

std::string cost(const Candidate& candidate, const Candidate& other) {
  if (!candidate.cv.rmse || !other.cv.rmse) return "";
  const double loss = *other.cv.rmse / *candidate.cv.rmse - 1.0;
  constexpr double kNone = 5e-4;  // beyond the digits that are shown
  if (std::abs(loss) < kNone) return ", with the same cross-validated error";
  return ", with a cross-validated error " + percent_words(std::abs(loss)) + (loss > 0.0 ? " higher" : " lower");
}

void name_others(const Candidate& candidate, const Check& check, std::span<const Candidate> listed,
                 std::vector<std::string>& said) {
  std::vector<std::string> seen;
  for (const Candidate& other : listed) {
    if (seen.size() == kMostNamed) return;
    if (other.number == candidate.number || !holds_there(other, check.name)) continue;
    const std::string what = difference(candidate, other, check);
    if (what.empty() || std::find(seen.begin(), seen.end(), what) != seen.end()) continue;
    seen.push_back(what);
    said.push_back(what + ": rank " + std::to_string(other.rank) + " holds" + cost(candidate, other) + ".");
  }
}

std::optional<double> bias_of(const Candidate& candidate, const char* method) {
  for (const auto& correction : candidate.back.corrections)
    if (correction.method == method) return correction.cv_bias;
  return std::nullopt;
}

/// What is advised where no other candidate holds. The columns of the plan are named by their keys.
std::string advice(const Candidate& candidate, const Check& check) {
  if (starts_with(check.name, "equal-spread")) {
    const auto thirds = bias_of(candidate, "smearing by thirds"), smearing = bias_of(candidate, "smearing");
    if (thirds && smearing && std::abs(*thirds) < std::abs(*smearing))
      return "smearing by thirds of the fitted value leaves less held-out bias (" + number_words(*thirds) + " for " +
             number_words(*smearing) + "); a weight column (data.weight) would mend the spread itself.";
    return "a weight column (data.weight) that falls where the spread grows, or another response form "
           "(forms.response).";
  }
  if (starts_with(check.name, "straightness"))
    return "a form with more bend in the menu of the term (forms.of): a spline, a quadratic, a fractional polynomial.";
  if (starts_with(check.name, "independence"))
    return "a predictor that follows the order (a season, a trend), and folds in blocks (data.order), which are in use "
           "when the plan names an order.";
  if (check.name == "normal-residuals")
    return "another response form (forms.response); the CV+ interval and smearing do not suppose normal residuals.";
  if (check.name == "separable-terms") return "leaving out one of the terms that say the same (data.ignore).";
  if (check.name == "no-single-row") return "a look at the rows named: are they measured right, do they belong here?";
  return "";
}

}  // namespace

std::vector<std::string> mends(const Candidate& candidate, const Check& check, std::span<const Candidate> listed) {
  std::vector<std::string> said;
  if (check.verdict.value_or(Verdict::holds) == Verdict::holds) return said;
  name_others(candidate, check, listed, said);
  if (const std::string words = advice(candidate, check); said.empty() && !words.empty()) said.push_back(words);
  return said;
}

}  // namespace formsieve::judge

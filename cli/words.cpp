#include "words.hpp"

#include "numbers.hpp"
#include "page.hpp"

#include <algorithm>
#include <map>

namespace formsieve::cli {

std::string criterion_words(judge::Criterion criterion) {
  switch (criterion) {
    case judge::Criterion::cv_rmse:
      return "CV RMSE";
    case judge::Criterion::aic:
      return "AIC";
    case judge::Criterion::aicc:
      return "AICc";
    case judge::Criterion::bic:
      return "BIC";
  }
  return {};
}

std::string short_check_name(const std::string& name) {
  static const std::map<std::string, std::string> kShort = {{"normal-residuals", "normal"},
                                                            {"equal-spread", "spread"},
                                                            {"equal-spread-by-term", "spread by term"},
                                                            {"equal-spread-by-thirds", "spread by thirds"},
                                                            {"equal-spread-any-shape", "spread of any shape"},
                                                            {"straightness-by-term", "straight by term"},
                                                            {"independence-at-lags", "independence at lags"},
                                                            {"straightness", "straight"},
                                                            {"separable-terms", "separable"},
                                                            {"no-single-row", "single row"},
                                                            {"independence", "independence"}};
  const auto found = kShort.find(name);
  return found == kShort.end() ? name : found->second;
}

std::vector<std::string> failing_assumptions(const judge::Candidate& candidate) {
  std::vector<std::string> failing;
  for (const checks::Check& check : candidate.checks) {
    if (check.passes) continue;
    std::string assumption = check.name;
    for (const char* shared : {"equal-spread", "straightness", "independence"})
      if (check.name.starts_with(shared)) assumption = shared;
    const std::string word = short_check_name(assumption);
    if (std::find(failing.begin(), failing.end(), word) == failing.end()) failing.push_back(word);
  }
  return failing;
}

std::string mark_words(const std::string& mark, const judge::Shortlist& shortlist) {
  const std::string near = significant(100.0 * shortlist.near_tie, 3) + " %";
  if (mark == "best") return "first by " + criterion_words(shortlist.criterion) + ", the criterion of the plan";
  if (mark == "recommended") return "lowest AIC among those whose CV RMSE is within " + near + " of the lowest";
  if (mark == "simplest") return "fewest coefficients among those within one standard error of the lowest CV RMSE";
  if (mark == "lowest AIC") return "lowest AIC of all that were examined";
  return mark;
}

std::string skew_words(const survey::ColumnProfile& profile) {
  switch (profile.skew) {
    case forms::SkewClass::none:
      return "none";
    case forms::SkewClass::mild:
      return profile.direction + ", mild";
    case forms::SkewClass::moderate:
      return profile.direction + ", moderate";
    case forms::SkewClass::severe:
      return profile.direction + ", severe";
  }
  return {};
}

std::string terms_sum(const judge::Candidate& candidate) {
  if (candidate.terms.empty()) return "no predictor, the mean alone";
  std::vector<std::string> names;
  for (const judge::Term& term : candidate.terms) names.push_back(forms::term_name(term.form, term.column));
  return joined(names, " + ");
}

std::string terms_difference(const judge::Candidate& candidate, const judge::Candidate& reference) {
  const auto form_in = [](const judge::Candidate& where, const std::string& column) {
    return std::find_if(where.terms.begin(), where.terms.end(),
                        [&](const judge::Term& term) { return term.column == column; });
  };
  std::vector<std::string> changed, without, added;
  for (const judge::Term& term : reference.terms) {
    const auto own = form_in(candidate, term.column);
    if (own == candidate.terms.end()) {
      without.push_back(term.column);
    } else if (!(own->form == term.form)) {
      changed.push_back(forms::term_name(own->form, own->column) + " for " + forms::term_name(term.form, term.column));
    }
  }
  for (const judge::Term& term : candidate.terms) {
    if (form_in(reference, term.column) == reference.terms.end()) {
      added.push_back(forms::term_name(term.form, term.column));
    }
  }
  std::vector<std::string> parts;
  if (!changed.empty()) parts.push_back("with " + joined(changed, ", "));
  if (!added.empty()) parts.push_back("adding " + joined(added, ", "));
  if (!without.empty()) parts.push_back("without " + joined(without, ", "));
  return joined(parts, "; ");
}

std::string form_of_x(const std::optional<forms::Form>& form) {
  if (!form) return "left out";
  if (form->kind == forms::Kind::levels) return "levels";
  return *form == forms::Form{} ? "untransformed" : forms::term_name(*form, "x");
}

std::string response_label(const judge::Candidate& candidate) { return forms::term_name(candidate.response, "y"); }

std::string shell_word(const std::string& word) {
  constexpr std::string_view kSafe = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_-./+,:@%=";
  if (!word.empty() && word.find_first_not_of(kSafe) == std::string::npos) return word;
  std::string quoted = "'";
  for (const char letter : word) quoted += letter == '\'' ? std::string("'\\''") : std::string(1, letter);
  return quoted + "'";
}

bool has_mark(const judge::Candidate& candidate, std::string_view mark) {
  return std::find(candidate.marks.begin(), candidate.marks.end(), mark) != candidate.marks.end();
}

}  // namespace formsieve::cli

// Short words for what the records name: forms, checks, criteria, marks.
#pragma once

#include <formsieve/forms.hpp>
#include <formsieve/judge.hpp>
#include <formsieve/survey.hpp>

#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::cli {

/// "CV RMSE", "AIC", "AICc", "BIC".
std::string criterion_words(judge::Criterion criterion);

/// A check's name as a table has room for: "spread" for "equal-spread"; an unknown name comes back as it is.
std::string short_check_name(const std::string& name);

/// The assumptions that a candidate's checks find broken, by short names, each once however many checks look at it:
/// "spread" for equal-spread and equal-spread-by-thirds.
std::vector<std::string> failing_assumptions(const judge::Candidate& candidate);

/// What a named line is, in one sentence: "recommended" → "lowest AIC among …".
std::string mark_words(const std::string& mark, const judge::Shortlist& shortlist);

/// "none", "right, moderate".
std::string skew_words(const survey::ColumnProfile& profile);

/// All terms of a candidate as a sum; "no predictor, the mean alone" when there are none.
std::string terms_sum(const judge::Candidate& candidate);

/// The terms as what differs from another candidate's: "without rain, with √(area) for ln(area)"; empty when nothing
/// differs.
std::string terms_difference(const judge::Candidate& candidate, const judge::Candidate& reference);

/// A form with x for the column, so that one table can speak of many columns: "ln(x)", "√(101 − x)", "untransformed",
/// "levels"; "left out" for none.
std::string form_of_x(const std::optional<forms::Form>& form);

/// The form of a response around "y", for columns too narrow for its name.
std::string response_label(const judge::Candidate& candidate);

/// A word to the shell, quoted where it needs to be.
std::string shell_word(const std::string& word);

bool has_mark(const judge::Candidate& candidate, std::string_view mark);

}  // namespace formsieve::cli

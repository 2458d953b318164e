#include "comparison_view.hpp"

#include "numbers.hpp"
#include "page.hpp"
#include "shortlist_view.hpp"
#include "text_table.hpp"
#include "words.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::cli {
namespace {

using judge::Candidate;
using judge::Comparison;
using judge::PairComparison;

constexpr int kErrorDigits = 4;
// A term longer than this is wrapped in its cell.
constexpr std::size_t kLeastTerm = 10;
// On narrower screens the key of a table is too narrow for the name of a check.
constexpr std::size_t kNarrow = 70;

std::string rank_of(const Comparison& comparison, std::size_t index) {
  return std::to_string(comparison.candidates[index].rank);
}

std::string pair_label(const Comparison& comparison, const PairComparison& pair) {
  return rank_of(comparison, pair.first) + " and " + rank_of(comparison, pair.second);
}

std::size_t label_width(const Comparison& comparison) {
  std::size_t width = 0;
  for (const PairComparison& pair : comparison.pairs) {
    width = std::max(width, display_width(pair_label(comparison, pair)));
  }
  return width;
}

// One column a candidate, headed by its rank.
std::vector<TableColumn> columns_by_rank(const Comparison& comparison, const std::string& key, std::size_t least) {
  std::vector<TableColumn> columns = {{key, false}};
  for (std::size_t i = 0; i < comparison.candidates.size(); ++i) {
    columns.push_back({rank_of(comparison, i), false, least, i + 1});
  }
  return columns;
}

bool all_same(const std::vector<std::string>& texts) {
  return std::all_of(texts.begin(), texts.end(), [&](const std::string& text) { return text == texts.front(); });
}

std::vector<Cell> row_of(const std::string& key, const std::vector<std::string>& texts) {
  std::vector<Cell> row = {{key}};
  for (const std::string& text : texts) row.push_back({text});
  return row;
}

std::vector<std::string> predictors_of(const Comparison& comparison) {
  std::vector<std::string> columns;
  for (const Candidate& candidate : comparison.candidates) {
    for (const judge::Term& term : candidate.terms) {
      if (std::find(columns.begin(), columns.end(), term.column) == columns.end()) columns.push_back(term.column);
    }
  }
  return columns;
}

std::vector<std::string> terms_of(const Comparison& comparison, const std::string& column) {
  std::vector<std::string> texts;
  for (const Candidate& candidate : comparison.candidates) {
    const auto term = std::find_if(candidate.terms.begin(), candidate.terms.end(),
                                   [&](const judge::Term& one) { return one.column == column; });
    texts.push_back(form_of_x(term == candidate.terms.end() ? std::nullopt : std::optional(term->form)));
  }
  return texts;
}

// Rows that differ as a table; what all have in one line.
void terms(Page& page, const Comparison& comparison) {
  page.heading("What differs?");
  TextTable table(columns_by_rank(comparison, "column", kLeastTerm));
  std::vector<std::string> shared, responses;
  for (const Candidate& candidate : comparison.candidates) responses.push_back(response_label(candidate));
  if (all_same(responses)) {
    shared.push_back("the response " + responses.front());
  } else {
    table.add_row(row_of("response y", responses));
  }
  for (const std::string& column : predictors_of(comparison)) {
    const std::vector<std::string> texts = terms_of(comparison, column);
    if (all_same(texts)) {
      const auto& known = comparison.candidates.front().terms;
      const auto term = std::find_if(known.begin(), known.end(), [&](const auto& one) { return one.column == column; });
      shared.push_back(held_together(forms::term_name(term->form, column)));
    } else {
      table.add_row(row_of(column, texts));
    }
  }
  if (!table.empty()) page.table(table);
  page.prose(shared.empty() ? "They share no term." : "Shared: " + joined(shared, ", ") + ".");
}

int error_decimals(const Comparison& comparison) {
  int decimals = 0;
  for (const Candidate& candidate : comparison.candidates) {
    if (candidate.cv.rmse) decimals = std::max(decimals, decimals_for(*candidate.cv.rmse, kErrorDigits));
  }
  return decimals;
}

void scores(Page& page, const Comparison& comparison) {
  page.heading("How good is each?");
  const int decimals = error_decimals(comparison);
  TextTable table({{"rank", true},
                   {"CV RMSE ± se", true, 0, 1},
                   {"R²", true, 0, 1},
                   {"AIC", true, 0, 2},
                   {"BIC", true, 0, 2},
                   {"coef.", true, 0, 2}});
  for (const Candidate& candidate : comparison.candidates) {
    table.add_row({{std::to_string(candidate.rank)},
                   {error_with_se(candidate.cv, decimals)},
                   {candidate.r2_own_units ? with_decimals(*candidate.r2_own_units, 3) : "undefined"},
                   {with_decimals(candidate.likelihood.aic, 1)},
                   {with_decimals(candidate.likelihood.bic, 1)},
                   {std::to_string(candidate.coefficients.size())}});
  }
  page.table(table);
  page.prose("CV RMSE and R² in own units; AIC and BIC include the Jacobian of the response form.");
}

std::string optional_figure(const std::optional<double>& value) { return value ? significant(*value, 3) : "none"; }

// A sentence of every pair under one question, the figures in a line of their own.
template <class Sentence, class Figures>
void by_pair(Page& page, const Comparison& comparison, const std::string& question, Sentence&& sentence,
             Figures&& figures) {
  bool headed = false;
  const std::size_t width = label_width(comparison);
  for (const PairComparison& pair : comparison.pairs) {
    const std::string text = sentence(pair);
    if (text.empty()) continue;
    if (!headed) page.heading(question);
    headed = true;
    page.labelled(pair_label(comparison, pair), width, text);
    const std::string numbers = figures(pair);
    if (!numbers.empty()) page.labelled("", width, numbers);
  }
}

void folds(Page& page, const Comparison& comparison) {
  by_pair(
      page, comparison, "Is one more accurate than fold noise?",
      [](const PairComparison& pair) { return pair.folds.words; },
      [](const PairComparison& pair) {
        if (!pair.folds.t) return std::string();
        return "corrected resampled t " + significant(*pair.folds.t, 3) + " on " + significant(*pair.folds.df, 3) +
               " df, p " + p_value(*pair.folds.p) + "; mean squared errors differ by " +
               significant(*pair.folds.mse, 3) + " ± " + significant(*pair.folds.mse_se, 3);
      });
}

std::string likelihood_figures(const judge::LikelihoodDifference& likelihood) {
  std::string text = "log-likelihoods differ by " + significant(likelihood.log_likelihood, 4);
  if (likelihood.z) {
    text += "; Vuong z " + significant(*likelihood.z, 3) + " uncorrected, " + significant(*likelihood.z_aic, 3) +
            " with the AIC penalty, " + significant(*likelihood.z_bic, 3) + " with the BIC penalty";
  }
  return text;
}

void likelihoods(Page& page, const Comparison& comparison) {
  by_pair(
      page, comparison, "Does the likelihood tell them apart?",
      [](const PairComparison& pair) { return pair.likelihood ? pair.likelihood->words : std::string(); },
      [](const PairComparison& pair) { return likelihood_figures(*pair.likelihood); });
}

void linear_or_log(Page& page, const Comparison& comparison) {
  by_pair(
      page, comparison, "Linear or log-linear?",
      [](const PairComparison& pair) { return pair.linear_log ? pair.linear_log->words : std::string(); },
      [](const PairComparison& pair) {
        const judge::LinearLogTest& test = *pair.linear_log;
        return "PE test, t against the linear one " + optional_figure(test.t_linear) + " (p " +
               (test.p_linear ? p_value(*test.p_linear) : "none") + "), against the log-linear one " +
               optional_figure(test.t_log) + " (p " + (test.p_log ? p_value(*test.p_log) : "none") + ")";
      });
}

std::string values_text(const judge::Disagreement& disagreement) {
  std::vector<std::string> parts;
  for (const auto& [column, value] : disagreement.values) {
    parts.push_back(held_together(column + " = " + (value.empty() ? "?" : value)));
  }
  return parts.empty() ? "" : "there " + joined(parts, ", ");
}

void disagreements(Page& page, const Comparison& comparison) {
  by_pair(
      page, comparison, "Where do their predictions part?",
      [](const PairComparison& pair) { return pair.disagreement ? pair.disagreement->words : std::string(); },
      [](const PairComparison& pair) { return values_text(*pair.disagreement); });
}

const checks::Check* check_of(const Candidate& candidate, const std::string& name) {
  const auto found = std::find_if(candidate.checks.begin(), candidate.checks.end(),
                                  [&](const checks::Check& check) { return check.name == name; });
  return found == candidate.checks.end() ? nullptr : &*found;
}

// A check's name in words that a narrow cell can break.
std::string spaced(std::string name) {
  std::replace(name.begin(), name.end(), '-', ' ');
  return name;
}

// A verdict and its size; a check that the rows cannot support has neither.
Cell check_cell(const checks::Check* check) {
  if (check == nullptr) return {"not run"};
  if (!check->verdict && check->passes && !check->p) return {"untested"};
  std::string verdict = check->passes ? "passes" : "fails";
  if (check->verdict) verdict = checks::verdict_word(*check->verdict);
  return {verdict + ", " + significant(check->size, 3), check->passes ? Tone::plain : Tone::alarm};
}

void assumption_checks(Page& page, const Comparison& comparison) {
  std::vector<std::string> names;
  for (const Candidate& candidate : comparison.candidates) {
    for (const checks::Check& check : candidate.checks) {
      if (std::find(names.begin(), names.end(), check.name) == names.end()) names.push_back(check.name);
    }
  }
  if (names.empty()) return;
  page.heading("Which assumptions fail?");
  TextTable table(columns_by_rank(comparison, "check", 0));
  for (const std::string& name : names) {
    std::vector<Cell> row = {{page.width() < kNarrow ? spaced(name) : name}};
    for (const Candidate& candidate : comparison.candidates) row.push_back(check_cell(check_of(candidate, name)));
    table.add_row(std::move(row));
  }
  page.table(table);
  page.prose(
      "After each verdict its size, which does not grow with the number of rows; formsieve show says what it is.");
}

void remaining_bias(Page& page, const Comparison& comparison) {
  page.heading("What does going back to own units leave?");
  std::size_t width = 0;
  for (std::size_t i = 0; i < comparison.candidates.size(); ++i) {
    width = std::max(width, rank_of(comparison, i).size());
  }
  for (std::size_t i = 0; i < comparison.candidates.size(); ++i) {
    const judge::RemainingBias& bias = comparison.bias[i];
    const bool identity = comparison.candidates[i].response == forms::Form{};
    page.labelled(rank_of(comparison, i), width,
                  (identity ? "no way back: " : "with " + bias.correction + ": ") + bias.words);
  }
}

std::string title(const Comparison& comparison) {
  std::vector<std::string> names;
  for (const Candidate& candidate : comparison.candidates) {
    const std::string rank = std::to_string(candidate.rank);
    names.push_back(candidate.marks.empty() ? rank : rank + " (" + joined(candidate.marks, ", ") + ")");
  }
  return "Ranks " + listed(names);
}

}  // namespace

std::string comparison_page(const judge::Comparison& comparison, const std::string& run_folder,
                            const Terminal& terminal) {
  Page page(terminal);
  page.heading(title(comparison));
  page.prose("y is " + comparison.data.response + " in " + comparison.data.file + "; " +
             counted(comparison.data.rows_used, "row") + ", " + counted(comparison.folds.count, "fold") + ".");
  for (const std::string& sentence : comparison.missing) page.note(sentence);
  terms(page, comparison);
  scores(page, comparison);
  folds(page, comparison);
  likelihoods(page, comparison);
  linear_or_log(page, comparison);
  assumption_checks(page, comparison);
  remaining_bias(page, comparison);
  disagreements(page, comparison);
  page.heading("To keep in mind");
  for (const std::string& sentence : comparison.cautions) page.note(sentence);
  page.blank();
  page.prose("One of them in full:");
  page.command("formsieve show " + shell_word(run_folder) + " " + rank_of(comparison, 0));
  return page.text();
}

}  // namespace formsieve::cli

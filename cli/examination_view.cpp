#include "examination_view.hpp"

#include "numbers.hpp"
#include "text_table.hpp"
#include "words.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::cli {
namespace {

constexpr std::size_t kVerdictWidth = 8;

std::string check_statistic(const checks::Check& check) {
  std::string text = check.method;
  if (check.statistic) text += ": statistic " + significant(*check.statistic);
  if (check.df && check.df2) {
    text += " on " + significant(*check.df) + " and " + significant(*check.df2) + " df";
  } else if (check.df) {
    text += " on " + significant(*check.df) + " df";
  }
  if (check.p) text += ", p " + p_value(*check.p);
  if (check.p_adjusted) text += ", " + p_value(*check.p_adjusted) + " after Holm's adjustment";
  return text;
}

// Files of earlier versions have no verdict beside a p-value.
std::string verdict_label(const checks::Check& check) {
  if (check.verdict) return std::string(checks::verdict_word(*check.verdict));
  if (!check.passes) return "fails";
  return check.p ? "passes" : "untested";
}

// Term by term, where the whole does not hold.
std::string parts_words(const checks::Check& check) {
  std::vector<std::string> words;
  for (const checks::CheckPart& part : check.parts)
    words.push_back(part.subject + " " + significant(part.size, 2) + (part.p ? " (p " + p_value(*part.p) + ")" : ""));
  return words.empty() ? "" : "One by one, size and p: " + joined(words, ", ");
}

void show_check(Page& page, const checks::Check& check) {
  const bool holds = check.passes && check.verdict.value_or(checks::Verdict::holds) == checks::Verdict::holds;
  std::string found = check.name + ": " + check.size_words;
  if (!check.note.empty()) found += "; " + check.note;
  page.labelled(verdict_label(check), kVerdictWidth, found, check.passes ? Tone::plain : Tone::alarm);
  const std::string asked = check.hypothesis.empty() ? "" : "Supposed: " + check.hypothesis + "; ";
  page.labelled("", kVerdictWidth, asked + check_statistic(check));
  if (holds) return;
  if (const std::string parts = parts_words(check); !parts.empty()) page.labelled("", kVerdictWidth, parts);
  for (const std::string& mend : check.mends) page.labelled("", kVerdictWidth, "What may mend it: " + mend);
}

std::string signed_figure(double value, int decimals) {
  return (value > 0.0 ? "+" : "") + with_decimals(value, decimals);
}

std::string row_name(const checks::InfluentialRow& row) {
  return row.line > 0 ? grouped(row.line) : grouped(row.row + 1) + " in use";
}

void influential_rows(Page& page, const std::vector<checks::InfluentialRow>& rows) {
  TextTable table({{"line"},
                   {"leverage", true, 0, 1},
                   {"Cook", true, 0, 1},
                   {"residual", true, 0, 2},
                   {"Bonferroni p", true, 0, 2},
                   {"moves", true, 0, 3},
                   {"most of all", false, 12, 3}});
  for (const checks::InfluentialRow& row : rows)
    table.add_row({{row_name(row)},
                   {significant(row.leverage, 3)},
                   {significant(row.cook, 3)},
                   {signed_figure(row.studentised, 2)},
                   {p_value(row.p_bonferroni)},
                   {signed_figure(row.moved_se, 2) + " se"},
                   {row.moved_term}});
  page.table(table);
}

// What becomes of the ranking when a row is left out.
void leaders(Page& page, const judge::Candidate& candidate) {
  bool asked = false, changed = false;
  for (const checks::InfluentialRow& row : candidate.influence.rows) {
    if (!row.leader_without) continue;
    asked = true;
    if (*row.leader_without == 1) continue;
    changed = true;
    page.note("Without line " + row_name(row) + " rank " + std::to_string(*row.leader_without) +
              " leads the candidates listed.");
  }
  if (asked && !changed) page.note("Leaving out any one of these rows does not change who leads the shortlist.");
}

std::string share(const std::optional<double>& value) {
  return value ? with_decimals(100.0 * *value, 1) + " %" : std::string("undefined");
}

}  // namespace

bool is_identity(const forms::Form& form) { return form.kind == forms::Kind::identity; }

std::string optional_figure(const std::optional<double>& value) {
  return value ? significant(*value) : std::string("undefined");
}

std::string mean_error(const std::optional<double>& value, const std::optional<double>& rmse) {
  if (!value || !rmse) return optional_figure(value);
  return with_decimals(*value, decimals_for(*rmse, kErrorDigits));
}

void show_intervals(Page& page, const judge::Candidate& candidate) {
  if (candidate.back.intervals.empty()) return;
  page.heading("How far may a new row lie from its prediction?");
  TextTable table({{"interval"},
                   {"promised", true, 0, 1},
                   {"held out, inside", true, 0, 1},
                   {"below", true, 0, 2},
                   {"above", true, 0, 2},
                   {"median width", true, 0, 3}});
  for (const backtransform::Interval& one : candidate.back.intervals)
    table.add_row({{one.method},
                   {with_decimals(100.0 * one.level, 0) + " %"},
                   {share(one.coverage)},
                   {share(one.below)},
                   {share(one.above)},
                   {optional_figure(one.median_width_own)}});
  page.table(table);
  for (const backtransform::Interval& one : candidate.back.intervals)
    if (!one.note.empty()) page.note(one.method + ": " + one.note);
  page.prose("Widths in units of " + candidate.response_column +
             ". The forms were chosen on these rows: expect a little less to lie inside on new ones.");
}

void show_effects(Page& page, const judge::Candidate& candidate) {
  if (candidate.effects.empty()) return;
  page.heading("What goes with a change of each predictor?");
  for (const backtransform::Effect& effect : candidate.effects) page.note(effect.words);
  page.prose(
      "Compared are means in own units, the other predictors at their medians or most frequent levels. Intervals hold "
      "the correction of the bias fixed and do not know of the search; what goes with a change need not come of it.");
}

void show_checks(Page& page, const judge::Candidate& candidate) {
  if (candidate.checks.empty()) return;
  page.heading("What is wrong with it?");
  for (const checks::Check& check : candidate.checks) show_check(page, check);
}

void show_influence(Page& page, const judge::Candidate& candidate) {
  const checks::Influence& influence = candidate.influence;
  if (influence.empty()) return;
  page.heading("Does it rest on a few rows?");
  if (!influence.rows.empty()) influential_rows(page, influence.rows);
  leaders(page, candidate);
  for (const std::string& words : influence.words) page.note(words);
}

void show_corrections(Page& page, const judge::Candidate& candidate) {
  const std::vector<backtransform::Correction>& corrections = candidate.back.corrections;
  if (is_identity(candidate.response) || corrections.empty()) return;
  page.heading("What does going back to own units cost?");
  TextTable table({{"correction"},
                   {"factor", true, 0, 1},
                   {"mean shift", true, 0, 1},
                   {"held-out mean error", true, 0, 2},
                   {"held-out RMSE", true, 0, 2}});
  for (const backtransform::Correction& one : corrections) {
    const bool used = one.method == candidate.back.used;
    table.add_row({{one.method + (used ? " (used)" : ""), used ? Tone::strong : Tone::plain},
                   {significant(one.factor)},
                   {one.shift ? mean_error(one.shift, one.cv_rmse) : std::string()},
                   {mean_error(one.cv_bias, one.cv_rmse)},
                   {optional_figure(one.cv_rmse)}});
  }
  page.table(table);
  for (const backtransform::Correction& one : corrections)
    if (!one.note.empty()) page.note(one.method + ": " + one.note);
  if (!candidate.back.mean_median_words.empty()) page.prose(candidate.back.mean_median_words);
  if (!candidate.back.why_used.empty()) page.prose(candidate.back.why_used);
}

}  // namespace formsieve::cli

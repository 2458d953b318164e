#include "pipeline/draft_text.hpp"

#include "checks/checks.hpp"
#include "pipeline/plan_text.hpp"
#include "run/duration.hpp"
#include "run/plan_forms.hpp"
#include "survey/words.hpp"

#include <algorithm>

namespace formsieve::pipeline {

namespace {

constexpr std::size_t kMostLevelsNamed = 6;

/// A form as a plan writes it; its parameters are numbers, so that the plan means the same on other rows.
std::string entry_of(const forms::Form& form) {
  run::FormEntry entry;
  entry.form = std::string(forms::kind_name(form.kind));
  entry.parameters = form.parameters;
  if (form.kind == forms::Kind::spline) entry.parameters = {static_cast<double>(form.parameters.size())};
  entry.reflect = form.reflect;
  if (form.shift != 0.0) entry.shift = form.shift;
  return run::entry_text(entry);
}

std::string form_remark(const forms::Form& form, const survey::ColumnProfile& profile) {
  std::string remark = form.kind == forms::Kind::identity ? "as it is" : forms::term_name(form, profile.facts.name);
  for (const survey::FormTrial& trial : profile.forms) {
    if (trial.form != form) continue;
    if (trial.skewness_after) remark += "; skewness " + survey::rounded(*trial.skewness_after, 2);
    if (!trial.why.empty() && form.kind != forms::Kind::identity) remark += "; " + trial.why;
  }
  return remark;
}

std::vector<Remarked> menu_lines(const std::vector<forms::Form>& menu, const survey::ColumnProfile& profile) {
  std::vector<Remarked> lines;
  for (const forms::Form& form : menu) lines.push_back({entry_of(form), form_remark(form, profile)});
  return lines;
}

std::string skew_words(const survey::ColumnProfile& profile) {
  const std::string figure = "skewness " + survey::rounded(profile.facts.skewness, 2);
  switch (profile.skew) {
    case forms::SkewClass::none:
      return figure + ", hardly any";
    case forms::SkewClass::mild:
      return figure + ", mild, to the " + profile.direction;
    case forms::SkewClass::moderate:
      return figure + ", moderate, to the " + profile.direction;
    case forms::SkewClass::severe:
      return figure + ", severe, to the " + profile.direction;
  }
  return figure;
}

std::string sign_words(const forms::ColumnFacts& facts) {
  const std::string zeros = facts.n_zero == 1 ? "1 zero" : std::to_string(facts.n_zero) + " zeros";
  if (facts.n_negative > 0) return std::to_string(facts.n_negative) + " negative, " + zeros;
  return facts.n_zero > 0 ? zeros : "no zeros";
}

std::string column_words(const survey::ColumnProfile& profile) {
  const forms::ColumnFacts& facts = profile.facts;
  if (!facts.text)
    return survey::readable(facts.min) + " to " + survey::readable(facts.max) + ", median " +
           survey::readable(profile.median) + "; " + skew_words(profile) + "; " + sign_words(facts);
  std::string words = std::to_string(facts.levels.size()) + " levels:";
  for (std::size_t i = 0; i < facts.levels.size() && i < kMostLevelsNamed; ++i)
    words += (i == 0 ? " " : ", ") + facts.levels[i] + " " + std::to_string(facts.level_counts[i]);
  return words + (facts.levels.size() > kMostLevelsNamed ? ", …" : "");
}

void write_head(PlanText& text, const Prepared& prepared, const DraftFindings& findings) {
  text.comment("A plan for formsieve, drafted from " + std::to_string(findings.n_rows_read) + " rows of " +
               prepared.table.source + ". It runs as it is; edit it to what you know of the data:");
  text.comment("formsieve search PLAN.toml, where PLAN.toml is this file.");
  text.comment("A line such as '# weight = …' is a setting that is off; take the '# ' away to switch it on.");
  const std::size_t n_used = prepared.table.n_rows;
  if (n_used == findings.n_rows_read) return;
  std::string where;
  for (const auto& [column, count] : prepared.summary.dropped)
    where += (where.empty() ? "" : ", ") + column + " on " + std::to_string(count);
  text.comment(std::to_string(findings.n_rows_read - n_used) + " rows are left out because a value is missing: " +
               where + ". The figures below are of the " + std::to_string(n_used) + " rows in use.");
}

void write_optional(PlanText& text, const std::string& key, const std::optional<std::string>& value,
                    const std::string& example, const std::string& remark) {
  value ? text.set(key, toml_string(*value), remark) : text.off(key, toml_string(example), remark);
}

void write_ignored(PlanText& text, const run::Plan& plan, const DraftFindings& findings) {
  std::vector<Remarked> ignored;
  for (const std::string& column : plan.data.ignore) ignored.push_back({toml_string(column), ""});
  for (const auto& [column, why] : findings.set_aside) ignored.push_back({toml_string(column), why});
  if (ignored.empty())
    text.off("ignore", toml_strings({"column"}), "columns that are no predictors and cost no rows");
  else
    text.list("ignore", ignored);
}

/// Bounds that a column's name and range suggest: an example that makes sense here.
std::string example_bounds(const Prepared& prepared) {
  for (const survey::ColumnProfile& profile : prepared.survey.columns) {
    const forms::ColumnFacts& facts = profile.facts;
    if (facts.text || facts.n_distinct <= 2 || facts.min < 0.0) continue;
    const bool percent = facts.name.find("percent") != std::string::npos && facts.max <= 100.0;
    const bool share = !facts.whole && facts.max <= 1.0;
    if (percent || share) return "{ " + toml_key(facts.name) + (percent ? " = [0, 100] }" : " = [0, 1] }");
  }
  return "{ column = [0, inf] }";
}

std::string bounds_of(const run::Plan& plan) {
  std::string inside;
  for (const auto& [column, bounds] : plan.data.bounds)
    inside += (inside.empty() ? "" : ", ") + toml_key(column) + " = [" + run::number_text(bounds.first) + ", " +
              run::number_text(bounds.second) + "]";
  return "{ " + inside + " }";
}

void write_roles(PlanText& text, const run::Plan& plan) {
  write_optional(text, "weight", plan.data.weight, "column",
                 "a column of positive precisions: the error variance is σ² divided by it");
  write_optional(text, "group", plan.data.group, "column", "rows with the same value stay in one fold");
  write_optional(text, "order", plan.data.order, "column", "folds are blocks of consecutive rows in this order");
  write_optional(text, "fold", plan.data.fold, "column", "the folds themselves (one of group, order, fold at most)");
}

std::string separator_name(char separator) {
  return separator == ';' ? "semicolon" : separator == '\t' ? "tab" : "comma";
}

/// How the file is written; of no concern to a database.
void write_dialect(PlanText& text, const run::Plan& plan, const Prepared& prepared) {
  if (plan.data.query) return;
  const table::Dialect& found = prepared.table.dialect;
  write_optional(text, "separator", plan.data.separator, separator_name(found.separator),
                 "as found in the file; comma, semicolon or tab");
  write_optional(text, "decimal", plan.data.decimal, found.decimal == ',' ? "comma" : "point",
                 "as found in the file; point or comma");
  const std::string remark = "cells that mean \"no value\"";
  if (plan.data.missing)
    text.set("missing", toml_strings(*plan.data.missing), remark);
  else
    text.off("missing", toml_strings(table::CsvOptions{}.missing), remark);
  const std::string text_remark = "columns of numbers that are names, such as codes: taken as text";
  if (plan.data.text.empty())
    text.off("text", toml_strings({"column"}), text_remark);
  else
    text.set("text", toml_strings(plan.data.text), text_remark);
}

void write_data(PlanText& text, const run::Plan& plan, const Prepared& prepared, const DraftFindings& findings) {
  text.table("data");
  text.set("file", toml_string(plan.data.file), "looked up beside this plan");
  write_optional(text, "query", plan.data.query, "select * from stores", "for an SQLite database: the rows to read");
  text.set("response", toml_string(plan.data.response), column_words(profile_of(prepared.survey, plan.data.response)));
  write_ignored(text, plan, findings);
  write_roles(text, plan);
  const std::string remark = "physical limits: a value outside is an error, reflections start from the upper one";
  if (plan.data.bounds.empty())
    text.off("bounds", example_bounds(prepared), remark);
  else
    text.set("bounds", bounds_of(plan), remark);
  write_dialect(text, plan, prepared);
  text.set("rare_levels", std::to_string(plan.data.rare_levels),
           "levels of text on fewer rows are pooled into one (common practice)");
}

void write_directions(PlanText& text, const run::Plan& plan, const std::string& example) {
  const std::string remark = "candidates whose fitted effect goes the other way are set aside and counted";
  std::string inside;
  for (const auto& [column, direction] : plan.forms.direction)
    inside += (inside.empty() ? "" : ", ") + toml_key(column) + " = " + toml_string(direction);
  if (inside.empty())
    text.off("direction", "{ " + toml_key(example) + " = \"rising\" }", remark);
  else
    text.set("direction", "{ " + inside + " }", remark);
}

/// A predictor of numbers to show settings with.
std::string example_predictor(const Prepared& prepared) {
  for (const judge::PredictorMenu& menu : prepared.menus)
    if (!profile_of(prepared.survey, menu.column).facts.text) return menu.column;
  return prepared.menus.front().column;
}

void write_forms(PlanText& text, const run::Plan& plan, const Prepared& prepared) {
  text.table("forms");
  text.comment(
      "Forms of the response. Every form added here or below costs optimism: keep those that you could defend.");
  text.list("response", menu_lines(prepared.data.response_forms, profile_of(prepared.survey, plan.data.response)));
  for (const std::string& note : prepared.response_notes) text.comment(note);
  text.set("default", "\"survey\"",
           "predictors without a list below get the survey's suggestions; or a list of forms for all of them");
  const std::string example = example_predictor(prepared);
  const std::string remark = "predictors that are in every candidate";
  if (plan.forms.always.empty())
    text.off("always", toml_strings({example}), remark);
  else
    text.set("always", toml_strings(plan.forms.always), remark);
  write_directions(text, plan, example);
}

void write_menus(PlanText& text, const Prepared& prepared) {
  text.table("forms.of");
  text.comment(
      "One list a predictor; leaving the predictor out is always tried besides. The skewness beside a form is what the "
      "column has after it (G1, Joanes & Gill 1998); its classes mild from 0.5, moderate from 1 and severe from 2 are "
      "common practice, and so are the suggestions: the search decides.");
  for (const judge::PredictorMenu& menu : prepared.menus) {
    const survey::ColumnProfile& profile = profile_of(prepared.survey, menu.column);
    text.blank();
    text.comment(menu.column + ": " + column_words(profile));
    for (const std::string& note : profile.notes) text.comment("Note: " + note + ".");
    text.list(menu.column, menu_lines(menu.forms, profile));
    for (const std::string& note : menu.notes) text.comment(note);
  }
}

void write_max_terms(PlanText& text, const run::Plan& plan, const DraftFindings& findings) {
  if (plan.search.max_terms)
    text.set("max_terms", std::to_string(*plan.search.max_terms), "predictors in one candidate at most");
  else if (findings.max_terms)
    text.off("max_terms", std::to_string(*findings.max_terms),
             "predictors in one candidate at most: with this every candidate can be scored, " + findings.candidates +
                 " of them; without a limit the space is searched by proof and local search");
  else
    text.off(
        "max_terms", "8",
        "predictors in one candidate at most; the space holds " + findings.candidates + " candidates without a limit");
}

void write_search(PlanText& text, const run::Plan& plan, const DraftFindings& findings) {
  const run::Plan::Search& search = plan.search;
  text.table("search");
  text.set("strategy", toml_string(search.strategy),
           "auto; every: each candidate is scored; proved: the lowest AIC with proof; guided: local search");
  write_max_terms(text, plan, findings);
  text.set("within", run::number_text(search.within), "AIC units from the best that count as near-best");
  text.set("folds", std::to_string(search.folds), "parts of the cross-validation");
  text.set("repeats", std::to_string(search.repeats), "how often the folds are dealt anew");
  text.set("seed", search.seed >> 63U == 0 ? std::to_string(search.seed) : toml_string(std::to_string(search.seed)),
           "deals the folds: the same seed gives the same folds everywhere");
  text.set("pool", std::to_string(search.pool), "candidates kept from the screen to be refitted and checked in full");
  text.set("budget", toml_string(run::duration_text(search.budget_seconds)),
           "a search that would take longer is refused before it starts; 45s, 90m, 8h, 2d");
}

void write_rank(PlanText& text, const run::Plan& plan) {
  const run::Plan::Rank& rank = plan.rank;
  text.table("rank");
  text.set("by", toml_string(rank.by),
           "cv_rmse, the cross-validated error in the response's own units; or aic, aicc, bic");
  text.set("shortlist", std::to_string(rank.shortlist), "candidates listed");
  text.set("families", rank.families ? "true" : "false",
           "candidates with nearly the same predictions are shown as one line; false lists each by itself");
  text.set("near_tie", run::number_text(rank.near_tie),
           "within this share of the best error, the lowest AIC is recommended");
  const std::string remark = "checks that a listed candidate must pass";
  if (rank.require.empty())
    text.off("require", toml_strings({checks::names().front()}), remark);
  else
    text.set("require", toml_strings(rank.require), remark);
  std::string all;
  for (const std::string& name : checks::names()) all += (all.empty() ? "" : ", ") + name;
  text.comment("The checks: " + all + ".");
}

}  // namespace

std::string draft_text(const run::Plan& plan, const Prepared& prepared, const DraftFindings& findings) {
  PlanText text;
  write_head(text, prepared, findings);
  write_data(text, plan, prepared, findings);
  write_forms(text, plan, prepared);
  write_menus(text, prepared);
  write_search(text, plan, findings);
  write_rank(text, plan);
  return text.text();
}

}  // namespace formsieve::pipeline

#include <formsieve/pipeline.hpp>

#include "pipeline/guarded.hpp"
#include "pipeline/draft_text.hpp"
#include "pipeline/estimate.hpp"

#include <algorithm>

namespace formsieve::pipeline {

namespace {

/// A drafted search should end within an hour or so on any machine (it is refused beyond the budget of 8 h, at some
/// hundred thousand candidates a second); a larger one is the reader's decision.
constexpr std::uint64_t kLargestDraft = 1'000'000'000;

/// Predictors by role that the preparation has left out, with its reason.
std::map<std::string, std::string> set_aside(const Prepared& prepared, const Roles& roles,
                                             const std::map<std::string, std::string>& hopeless) {
  std::map<std::string, std::string> reasons;
  for (const std::size_t index : roles.predictors) {
    const std::string& column = prepared.table.columns[index].name;
    const auto searched = [&](const judge::PredictorMenu& menu) { return menu.column == column; };
    if (std::any_of(prepared.menus.begin(), prepared.menus.end(), searched)) continue;
    const auto known = hopeless.find(column);
    const survey::ColumnProfile& profile = profile_of(prepared.survey, column);
    reasons[column] = known != hopeless.end()  ? known->second
                      : !profile.notes.empty() ? profile.notes.front()
                                               : "it cannot serve as a predictor";
  }
  return reasons;
}

/// The limit of terms that would let every candidate be scored, where the whole space is too large for that.
void limit_terms(DraftFindings& findings, const search::Space& space) {
  search::BigCount total = 0;
  const auto by_terms = search::count_by_terms(space);
  for (std::size_t n_terms = 0; n_terms < by_terms.size(); ++n_terms) {
    if (total + by_terms[n_terms] > kLargestDraft && n_terms > 1) {
      findings.max_terms = n_terms - 1;
      break;
    }
    total += by_terms[n_terms];
  }
  findings.candidates = grouped(total);
}

}  // namespace

namespace {

Result<std::string> draft_plan(const run::Plan& plan, unsigned threads) {
  auto table = load_table(plan, threads);
  if (!table) return table.error();
  DraftFindings findings;
  findings.n_rows_read = table->n_rows;
  survey::Options options;
  options.ignore = plan.data.ignore;
  options.response = plan.data.response;
  options.rare_level_count = plan.data.rare_levels;
  const auto hopeless = survey::unusable_columns(*table, options);

  const auto prepared = prepare(std::move(*table), plan);
  if (!prepared) return prepared.error();
  const auto roles = assign_roles(prepared->table, plan);
  if (!roles) return roles.error();
  findings.set_aside = set_aside(*prepared, *roles, hopeless);
  limit_terms(findings, prepared->space);
  return draft_text(plan, *prepared, findings);
}

}  // namespace

Result<std::string> draft(const run::Plan& plan, unsigned threads) {
  return guarded(plan.data.file, [&] { return draft_plan(plan, threads); });
}

}  // namespace formsieve::pipeline

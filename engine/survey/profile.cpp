#include <formsieve/survey.hpp>

#include <cmath>

#include "base/parallel.hpp"
#include "survey/column_profile.hpp"
#include "survey/requested.hpp"
#include "survey/usable.hpp"

namespace formsieve::survey {

namespace {

/// Fewer rows in steps of one prove nothing.
constexpr std::size_t kFewestRowNumbers = 10;

ColumnProfile profile_column(const table::Column& column, const Options& options) {
  if (column.type == table::ColumnType::text) return profile_text_column(column, options.rare_level_count);
  const auto bounds = options.bounds.find(column.name);
  return profile_number_column(column.name, column.numbers,
                               bounds == options.bounds.end() ? std::nullopt : std::optional(bounds->second),
                               column.name == options.response ? Role::response : Role::predictor);
}

bool looks_like_row_number(const table::Column& column) {
  if (column.type == table::ColumnType::text || column.numbers.size() < kFewestRowNumbers) return false;
  for (std::size_t row = 0; row < column.numbers.size(); ++row)
    if (column.numbers[row] != column.numbers.front() + static_cast<double>(row)) return false;
  return column.numbers.front() == std::nearbyint(column.numbers.front());
}

void set_aside_twins(std::vector<ColumnProfile>& profiles, const std::map<std::string, std::string>& reasons) {
  for (ColumnProfile& profile : profiles) {
    const auto reason = reasons.find(profile.facts.name);
    if (reason == reasons.end() || profile.set_aside) continue;
    profile.set_aside = true;
    profile.notes.insert(profile.notes.begin(), reason->second);
  }
}

}  // namespace

Result<Survey> profile(const table::Table& table, const Options& options) {
  if (const Status status = check_options(table, options); !status) return status.error();
  const std::vector<std::size_t> included = included_columns(table, options);
  Survey survey;
  survey.file = table.source;
  survey.sha256 = table.sha256;
  survey.n_rows = table.n_rows;
  survey.rare_level_count = options.rare_level_count;
  survey.columns.resize(included.size());
  base::parallel_for(included.size(), options.threads, [&](std::size_t i) {
    const table::Column& column = table.columns[included[i]];
    survey.columns[i] = profile_column(column, options);
    if (looks_like_row_number(column))
      survey.columns[i].notes.push_back(
          "it rises by 1 from row to row, as a row number does: ignore it if it is one (a judgement)");
  });
  set_aside_twins(survey.columns, twin_reasons(table, included, options.response));
  return survey;
}

}  // namespace formsieve::survey

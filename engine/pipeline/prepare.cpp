#include "pipeline/prepare.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace formsieve::pipeline {

namespace {

/// Share of the rows lost to one column beyond which the reader is told how to keep them (a judgement: a tenth of the
/// data is worth a sentence).
constexpr double kManyRowsDropped = 0.10;

/// An intercept, a slope and one degree of freedom for the residual.
constexpr std::size_t kFewestRows = 3;

/// Keeps only the given rows, in place.
void keep_rows(table::Table& table, const std::vector<std::size_t>& rows) {
  if (rows.size() == table.n_rows) return;
  const auto compact = [&rows](auto& values) {
    if (values.empty()) return;
    for (std::size_t i = 0; i < rows.size(); ++i) values[i] = values[rows[i]];
    values.resize(rows.size());
  };
  for (auto& column : table.columns) {
    compact(column.numbers);
    compact(column.codes);
    column.n_missing = static_cast<std::size_t>(
        std::count(column.codes.begin(), column.codes.end(), table::kMissingLevel) +
        std::count_if(column.numbers.begin(), column.numbers.end(), [](double x) { return std::isnan(x); }));
  }
  compact(table.line_of_row);
  table.n_rows = rows.size();
}

}  // namespace

bool named_in_plan(const run::Plan& plan, const std::string& column) {
  return plan.forms.of.contains(column) ||
         std::find(plan.forms.always.begin(), plan.forms.always.end(), column) != plan.forms.always.end();
}

bool only_repeats(const table::Table& table, const run::Plan& plan, const std::string& name) {
  survey::Options alone;
  alone.rare_level_count = plan.data.rare_levels;
  for (const auto& column : table.columns)
    if (column.name != name) alone.ignore.push_back(column.name);
  return survey::unusable_columns(table, alone).empty();
}

namespace {

/// Predictors that cannot serve whatever the rows (labels, constants, empty columns) must not cost rows: they are taken
/// out beforehand.
Status drop_hopeless(const table::Table& table, const run::Plan& plan, Roles& roles, std::vector<std::string>& notes) {
  survey::Options options;
  options.bounds = plan.data.bounds;
  options.rare_level_count = plan.data.rare_levels;
  for (std::size_t i = 0; i < table.columns.size(); ++i)
    if (std::find(roles.predictors.begin(), roles.predictors.end(), i) == roles.predictors.end())
      options.ignore.push_back(table.columns[i].name);
  const auto reasons = survey::unusable_columns(table, options);
  std::vector<std::size_t> kept;
  for (const std::size_t index : roles.predictors) {
    const std::string& name = table.columns[index].name;
    const auto reason = reasons.find(name);
    if (reason == reasons.end()) {
      kept.push_back(index);
      continue;
    }
    if (named_in_plan(plan, name)) {
      if (only_repeats(table, plan, name)) {
        kept.push_back(index);
        continue;
      }
      return Error{ErrorKind::data, "the column '" + name + "' cannot serve as a predictor: " + reason->second,
                   table.source, "take it out of forms.always and forms.of"};
    }
    notes.push_back("'" + name + "' is set aside: " + reason->second);
  }
  roles.predictors = std::move(kept);
  return {};
}

Status check_response(const table::Table& table, const run::Plan& plan, const Roles& roles) {
  const table::Column& response = table.columns[roles.response];
  if (response.type == table::ColumnType::text)
    return Error{ErrorKind::data, "the response '" + response.name + "' holds text, not numbers",
                 table.source + ", column '" + response.name + "'",
                 "name a numeric column as data.response (--response COLUMN)"};
  if (response.n_missing == table.n_rows)
    return Error{ErrorKind::data, "the response '" + response.name + "' has no value on any row", table.source,
                 "name another column as data.response"};
  if (roles.weight && table.columns[*roles.weight].type == table::ColumnType::text)
    return Error{ErrorKind::data, "the weight '" + table.columns[*roles.weight].name + "' holds text, not numbers",
                 table.source, "name a numeric column as data.weight"};
  if (roles.fold && roles.weight && *roles.fold == *roles.weight)
    return Error{ErrorKind::plan, "one column is both weight and fold", where_in_plan(plan, "data.fold"),
                 "name two different columns"};
  return {};
}

/// The rows in use; table and survey are cut down to them.
Status choose_rows(Prepared& prepared, const Roles& roles) {
  std::vector<std::string> needed = {prepared.table.columns[roles.response].name};
  for (const std::size_t index : roles.predictors) needed.push_back(prepared.table.columns[index].name);
  for (const auto& special : {roles.weight, roles.group, roles.order, roles.fold})
    if (special) needed.push_back(prepared.table.columns[*special].name);
  auto rows = design::complete_rows(prepared.table, needed);
  if (!rows) return rows.error();
  prepared.summary.rows_read = prepared.table.n_rows;
  prepared.summary.rows_used = rows->rows.size();
  prepared.summary.dropped = rows->dropped;
  for (const auto& [column, count] : rows->dropped)
    if (static_cast<double>(count) > kManyRowsDropped * static_cast<double>(prepared.table.n_rows))
      prepared.notes.push_back("'" + column + "' is missing on " + std::to_string(count) +
                               " rows, which are left out for every candidate; "
                               "data.ignore = [\"" +
                               column + "\"] (--ignore) would keep them");
  keep_rows(prepared.table, rows->rows);
  return {};
}

Status check_values(const Prepared& prepared, const Roles& roles) {
  const table::Column& response = prepared.table.columns[roles.response];
  if (response.numbers.size() < kFewestRows)
    return Error{ErrorKind::data,
                 "only " + std::to_string(response.numbers.size()) + " of " +
                     std::to_string(prepared.summary.rows_read) + " rows are complete; a search needs at least " +
                     std::to_string(kFewestRows),
                 prepared.table.source, "ignore columns that are often missing (data.ignore, --ignore), or add rows"};
  const auto [low, high] = std::minmax_element(response.numbers.begin(), response.numbers.end());
  if (*low == *high)
    return Error{ErrorKind::data,
                 "the response '" + response.name + "' is the same on all " + std::to_string(response.numbers.size()) +
                     " rows in use",
                 prepared.table.source, "there is nothing to explain; name another column as data.response"};
  if (!roles.weight) return {};
  const table::Column& weight = prepared.table.columns[*roles.weight];
  for (std::size_t i = 0; i < weight.numbers.size(); ++i)
    if (!(weight.numbers[i] > 0.0))
      return Error{ErrorKind::data, "the weight '" + weight.name + "' is not positive", line_text(prepared.table, i),
                   "weights are precisions (variance σ²/w) and must be above 0; remove the row or mend the weight"};
  return {};
}

/// Row indices in rising order of the order column, ties in table order.
std::vector<std::size_t> order_of(const table::Column& column, std::size_t n_rows) {
  std::vector<std::size_t> order(n_rows);
  std::iota(order.begin(), order.end(), std::size_t{0});
  if (column.type == table::ColumnType::numeric) {
    std::stable_sort(order.begin(), order.end(),
                     [&](std::size_t a, std::size_t b) { return column.numbers[a] < column.numbers[b]; });
  } else {
    std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
      return column.levels[column.codes[a]] < column.levels[column.codes[b]];
    });
  }
  return order;
}

Status deal_folds(Prepared& prepared, const Roles& roles, const run::Plan& plan) {
  design::FoldRequest request;
  request.count = plan.search.folds;
  request.repeats = plan.search.repeats;
  request.seed = plan.search.seed;
  const auto column = [&](const std::optional<std::size_t>& role) {
    return role ? &prepared.table.columns[*role] : nullptr;
  };
  request.group = column(roles.group);
  request.order = column(roles.order);
  request.given = column(roles.fold);
  std::vector<std::size_t> rows(prepared.table.n_rows);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  auto folds = design::make_folds(rows, request);
  if (!folds) return folds.error();
  prepared.folds = std::move(*folds);
  prepared.notes.insert(prepared.notes.end(), prepared.folds.remarks.begin(), prepared.folds.remarks.end());
  if (roles.order) prepared.order = order_of(prepared.table.columns[*roles.order], prepared.table.n_rows);
  return {};
}

void lay_out_space(Prepared& prepared, const run::Plan& plan) {
  const design::Layout layout = design::layout(prepared.data);
  prepared.space.n_responses = prepared.data.response_forms.size();
  prepared.space.max_terms = plan.search.max_terms;
  for (std::size_t j = 0; j < prepared.data.predictors.size(); ++j) {
    search::PredictorChoices choices;
    choices.always = prepared.data.predictors[j].always;
    for (const auto& [first, count] : layout.block[j]) choices.forms.push_back({first, count});
    prepared.space.predictors.push_back(std::move(choices));
  }
}

Status check_space(const Prepared& prepared, const run::Plan& plan) {
  const auto always =
      static_cast<std::size_t>(std::count_if(prepared.space.predictors.begin(), prepared.space.predictors.end(),
                                             [](const auto& predictor) { return predictor.always; }));
  if (plan.search.max_terms && always > *plan.search.max_terms)
    return Error{ErrorKind::plan,
                 "search.max_terms = " + std::to_string(*plan.search.max_terms) + " is below the " +
                     std::to_string(always) + " predictors of forms.always",
                 where_in_plan(plan, "search.max_terms"), "set search.max_terms to at least " + std::to_string(always)};
  return {};
}

void describe_data(Prepared& prepared, const run::Plan& plan) {
  prepared.summary.file = prepared.table.source;
  prepared.summary.sha256 = prepared.table.sha256;
  prepared.summary.response = plan.data.response;
  prepared.summary.weight = plan.data.weight.value_or("");
  prepared.summary.group = plan.data.group.value_or("");
  prepared.summary.order = plan.data.order.value_or("");
  prepared.summary.fold = plan.data.fold.value_or("");
}

Status profile_rows_in_use(Prepared& prepared, const run::Plan& plan, const Roles& roles) {
  survey::Options options;
  options.bounds = plan.data.bounds;
  options.rare_level_count = plan.data.rare_levels;
  options.response = plan.data.response;
  options.ignore = plan.data.ignore;
  for (const auto& special : {roles.weight, roles.group, roles.order, roles.fold})
    if (special) options.ignore.push_back(prepared.table.columns[*special].name);
  auto profiled = survey::profile(prepared.table, options);
  if (!profiled) return profiled.error();
  prepared.survey = std::move(*profiled);
  return {};
}

}  // namespace

std::size_t line_of(const table::Table& table, std::size_t row) {
  return row < table.line_of_row.size() ? table.line_of_row[row] : row + 1;
}

std::vector<std::size_t> lines_of(const table::Table& table) {
  std::vector<std::size_t> lines(table.n_rows);
  for (std::size_t i = 0; i < lines.size(); ++i) lines[i] = line_of(table, i);
  return lines;
}

std::string line_text(const table::Table& table, std::size_t row) {
  if (row < table.line_of_row.size()) return table.source + ", line " + std::to_string(table.line_of_row[row]);
  return table.source + ", row " + std::to_string(row + 1);
}

const survey::ColumnProfile& profile_of(const survey::Survey& survey, const std::string& column) {
  return *std::find_if(survey.columns.begin(), survey.columns.end(),
                       [&](const auto& profile) { return profile.facts.name == column; });
}

Result<Prepared> prepare(table::Table table, const run::Plan& plan) {
  auto roles = assign_roles(table, plan);
  if (!roles) return roles.error();
  Prepared prepared;
  prepared.table = std::move(table);
  if (auto status = check_response(prepared.table, plan, *roles); !status) return status.error();
  if (auto status = drop_hopeless(prepared.table, plan, *roles, prepared.notes); !status) return status.error();
  if (auto status = choose_rows(prepared, *roles); !status) return status.error();
  if (auto status = check_values(prepared, *roles); !status) return status.error();
  describe_data(prepared, plan);
  if (auto status = profile_rows_in_use(prepared, plan, *roles); !status) return status.error();

  prepared.data.n_rows = prepared.table.n_rows;
  prepared.data.response = prepared.table.columns[roles->response].numbers;
  if (roles->weight) prepared.data.weights = prepared.table.columns[*roles->weight].numbers;
  prepared.data.table_row.resize(prepared.table.n_rows);
  std::iota(prepared.data.table_row.begin(), prepared.data.table_row.end(), std::size_t{0});
  if (auto status = build_menus(prepared, *roles, plan); !status) return status.error();
  if (auto status = deal_folds(prepared, *roles, plan); !status) return status.error();
  lay_out_space(prepared, plan);
  if (auto status = check_space(prepared, plan); !status) return status.error();
  return prepared;
}

}  // namespace formsieve::pipeline

// From a plan and a table to everything that a search needs: roles of the columns, rows in use, menus, folds, the
// space.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>
#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

#include "design/design.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// What each column of the table is for. Indices into the table's columns.
struct Roles {
  std::size_t response = 0;
  std::vector<std::size_t> predictors;  ///< in table order, which is the plan's order
  std::optional<std::size_t> weight, group, order, fold;
};

/// Everything fixed before the first candidate is scored.
struct Prepared {
  table::Table table;     ///< the rows in use only
  survey::Survey survey;  ///< of the rows in use
  design::Data data;
  design::Folds folds;
  search::Space space;
  judge::DataSummary summary;
  std::vector<judge::PredictorMenu> menus;  ///< as searched, in plan order
  std::vector<std::string> response_notes;
  std::vector<std::string> notes;  ///< sentences for the reader: rows dropped, columns set aside, menus shortened
  std::vector<std::size_t> order;  ///< rows in the order of data.order; empty without one
  std::vector<int> direction;      ///< [predictors] +1 rising, −1 falling, 0 undeclared
};

/// Where the table of a plan is: a relative name is looked up beside the plan.
std::string data_path(const run::Plan& plan);

/// Errors: an unknown column (kind plan, nearest name), a response that is not numeric or is constant, weights that are
/// not positive, no complete rows, no predictor left, no response form possible, a form undefined on the rows in use
/// where a plan leaves nothing else (kind plan or data).
Result<Prepared> prepare(table::Table table, const run::Plan& plan);

/// Which column is for what. Errors as above.
Result<Roles> assign_roles(const table::Table& table, const run::Plan& plan);

/// Menus of predictors and response for the rows in use; fills data.response_forms, data.predictors[].menu, menus,
/// notes. `profiles` are those of the survey by table column.
Status build_menus(Prepared& prepared, const Roles& roles, const run::Plan& plan);

/// True when forms.always or forms.of names the column.
bool named_in_plan(const run::Plan& plan, const std::string& column);

/// True when all that is wrong with a column is that it repeats another one: harmless where a plan gives the two
/// different forms.
bool only_repeats(const table::Table& table, const run::Plan& plan, const std::string& name);

/// The profile of a column by name; it must be there.
const survey::ColumnProfile& profile_of(const survey::Survey& survey, const std::string& column);

/// Where a row in use stands in its table: the line, or the row counted from 1 where the table has no lines.
std::size_t line_of(const table::Table& table, std::size_t row);
/// That of every row in use.
std::vector<std::size_t> lines_of(const table::Table& table);

/// "coldstores.csv, line 7" of a row in use.
std::string line_text(const table::Table& table, std::size_t row);

/// "plan.toml:9:1" of a plan key, or the empty string.
std::string where_in_plan(const run::Plan& plan, const std::string& key);

}  // namespace formsieve::pipeline

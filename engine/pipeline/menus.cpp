#include "pipeline/prepare.hpp"

#include <algorithm>

namespace formsieve::pipeline {

namespace {

forms::Request request_of(const run::FormEntry& entry, std::size_t rare_levels) {
  forms::Request request;
  request.rare_level_count = rare_levels;
  request.form = entry.form;
  request.parameters = entry.parameters;
  request.reflect = entry.reflect;
  request.reflect_auto = entry.reflect_auto;
  request.shift = entry.shift.value_or(0.0);
  request.shift_auto = entry.shift_auto;
  return request;
}

/// The plan's entries settled for one column. `lenient`: a form that does not suit this kind of column at all is passed
/// over (the list was written for every predictor).
Result<std::vector<forms::MenuEntry>> settle_all(const std::vector<run::FormEntry>& entries,
                                                 const forms::ColumnFacts& facts, bool lenient, const std::string& key,
                                                 std::size_t rare_levels) {
  std::vector<forms::MenuEntry> wanted;
  for (const auto& entry : entries) {
    const bool is_levels = entry.form == "levels";
    if (lenient && is_levels != facts.text) continue;
    auto form = forms::settle(request_of(entry, rare_levels), facts);
    if (!form) {
      Error error = form.error();
      if (error.where.empty()) error.where = entry.where;
      error.message = "'" + key + "': " + error.message;
      return error;
    }
    wanted.push_back({std::move(*form), "listed in the plan"});
  }
  return wanted;
}

std::vector<std::string> notes_of(const forms::Menu& menu) {
  std::vector<std::string> notes;
  for (const auto& struck : menu.struck)
    notes.push_back(struck.label + " is struck: " + struck.why + (struck.repair.empty() ? "" : "; " + struck.repair));
  for (const auto& merged : menu.merged)
    notes.push_back(merged.dropped + " is merged into " + merged.kept + ": " + merged.why);
  return notes;
}

/// Adds what `more` struck and merged to `menu` and takes its entries.
void take_over(forms::Menu& menu, forms::Menu more) {
  menu.entries = std::move(more.entries);
  menu.struck.insert(menu.struck.end(), more.struck.begin(), more.struck.end());
  menu.merged.insert(menu.merged.end(), more.merged.begin(), more.merged.end());
}

Result<forms::Menu> menu_of(const run::Plan& plan, const forms::ColumnFacts& facts, const table::Column& column) {
  forms::Menu menu;
  const auto own = plan.forms.of.find(facts.name);
  const bool from_survey = own == plan.forms.of.end() && !plan.forms.default_menu;
  if (from_survey) {
    menu = forms::default_menu(facts, plan.data.rare_levels);
  } else {
    const bool lenient = own == plan.forms.of.end();
    auto wanted = settle_all(lenient ? *plan.forms.default_menu : own->second, facts, lenient,
                             lenient ? "forms.default" : "forms.of." + facts.name, plan.data.rare_levels);
    if (!wanted) return wanted.error();
    if (lenient && wanted->empty())
      menu = forms::default_menu(facts, plan.data.rare_levels);
    else
      menu.entries = std::move(*wanted);
  }
  if (column.type == table::ColumnType::text) return menu;
  take_over(menu, forms::admissible(menu.entries, facts, false));
  take_over(menu, survey::merge_near_equal(forms::Menu{menu.entries, {}, {}}, column.numbers, facts.name));
  return menu;
}

Error nothing_possible(const run::Plan& plan, const std::string& column, const forms::Menu& menu,
                       const std::string& key) {
  std::string why;
  std::string repair;
  for (const auto& struck : menu.struck) {
    why += (why.empty() ? "" : "; ") + struck.label + ": " + struck.why;
    if (repair.empty()) repair = struck.repair;
  }
  return Error{ErrorKind::plan, "none of the forms listed for '" + column + "' is possible on these rows (" + why + ")",
               where_in_plan(plan, key), repair.empty() ? "add \"identity\" to its list" : repair};
}

Status build_response(Prepared& prepared, const Roles& roles, const run::Plan& plan) {
  const forms::ColumnFacts& facts = profile_of(prepared.survey, prepared.table.columns[roles.response].name).facts;
  forms::Menu menu;
  if (plan.forms.response) {
    auto wanted = settle_all(*plan.forms.response, facts, false, "forms.response", plan.data.rare_levels);
    if (!wanted) return wanted.error();
    menu.entries = std::move(*wanted);
  } else {
    menu = forms::default_response_menu(facts);
  }
  take_over(menu, forms::admissible(menu.entries, facts, true));
  if (menu.entries.empty()) return nothing_possible(plan, facts.name, menu, "forms.response");
  for (const auto& entry : menu.entries) prepared.data.response_forms.push_back(entry.form);
  prepared.response_notes = notes_of(menu);
  return {};
}

/// Raw values of a predictor: numbers as they are, texts as codes of the levels form.
std::vector<double> raw_values(const table::Column& column, const forms::Form& form) {
  if (column.type == table::ColumnType::numeric) return column.numbers;
  std::vector<double> code_of(column.levels.size(), 0.0);
  for (std::size_t level = 0; level < column.levels.size(); ++level)
    if (const auto code = forms::level_code(form, column.levels[level])) code_of[level] = static_cast<double>(*code);
  std::vector<double> raw;
  raw.reserve(column.codes.size());
  for (const std::uint32_t code : column.codes) raw.push_back(code_of[code]);
  return raw;
}

Result<int> direction_of(const run::Plan& plan, const table::Column& column) {
  const auto declared = plan.forms.direction.find(column.name);
  if (declared == plan.forms.direction.end()) return 0;
  if (column.type == table::ColumnType::text)
    return Error{ErrorKind::plan,
                 "'forms.direction' names '" + column.name + "', which holds text and has no direction",
                 where_in_plan(plan, "forms.direction"), "take it out of forms.direction"};
  return declared->second == "rising" ? 1 : -1;
}

Status add_predictor(Prepared& prepared, const run::Plan& plan, std::size_t index) {
  const table::Column& column = prepared.table.columns[index];
  const survey::ColumnProfile& profile = profile_of(prepared.survey, column.name);
  if (profile.set_aside && !(named_in_plan(plan, column.name) && only_repeats(prepared.table, plan, column.name))) {
    const std::string why = profile.notes.empty() ? "it cannot serve as a predictor" : profile.notes.front();
    if (named_in_plan(plan, column.name))
      return Error{ErrorKind::data,
                   "the column '" + column.name + "' cannot serve as a predictor on the rows in use: " + why,
                   prepared.table.source, "take it out of forms.always and forms.of"};
    prepared.notes.push_back("'" + column.name + "' is set aside: " + why);
    return {};
  }
  auto menu = menu_of(plan, profile.facts, column);
  if (!menu) return menu.error();
  if (menu->entries.empty())
    return nothing_possible(plan, column.name, *menu,
                            plan.forms.of.contains(column.name) ? "forms.of" : "forms.default");
  const auto direction = direction_of(plan, column);
  if (!direction) return direction.error();

  design::Predictor predictor;
  predictor.column = column.name;
  predictor.text = column.type == table::ColumnType::text;
  predictor.always =
      std::find(plan.forms.always.begin(), plan.forms.always.end(), column.name) != plan.forms.always.end();
  judge::PredictorMenu listed{column.name, predictor.always, {}, {}, notes_of(*menu)};
  for (const auto& entry : menu->entries) {
    predictor.menu.push_back(entry.form);
    listed.forms.push_back(entry.form);
    listed.labels.push_back(forms::term_name(entry.form, column.name));
  }
  predictor.raw = raw_values(column, predictor.menu.front());
  prepared.data.predictors.push_back(std::move(predictor));
  prepared.menus.push_back(std::move(listed));
  prepared.direction.push_back(*direction);
  return {};
}

}  // namespace

Status build_menus(Prepared& prepared, const Roles& roles, const run::Plan& plan) {
  if (auto status = build_response(prepared, roles, plan); !status) return status;
  for (const std::size_t index : roles.predictors)
    if (auto status = add_predictor(prepared, plan, index); !status) return status;
  if (prepared.data.predictors.empty())
    return Error{ErrorKind::data, "no column is left that could serve as a predictor", prepared.table.source,
                 "the table needs at least one column besides the response that varies and is not ignored"};
  return {};
}

}  // namespace formsieve::pipeline

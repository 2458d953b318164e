#include "pipeline/prepare.hpp"

#include <algorithm>
#include <set>

namespace formsieve::pipeline {

namespace {

std::vector<std::string> names_of(const table::Table& table) {
  std::vector<std::string> names;
  for (const auto& column : table.columns) names.push_back(column.name);
  return names;
}

Error unknown_column(const table::Table& table, const run::Plan& plan, const std::string& name,
                     const std::string& key) {
  const auto names = names_of(table);
  std::string hint;
  if (const auto near = run::nearest(name, names)) {
    hint = "did you mean '" + *near + "'?";
  } else {
    hint = "the table has the columns ";
    for (std::size_t i = 0; i < names.size() && i < 12; ++i) hint += (i == 0 ? "" : ", ") + names[i];
    if (names.size() > 12) hint += ", …";
  }
  return Error{ErrorKind::plan,
               "'" + key + "' names the column '" + name + "', which " + table.source + " does not have",
               where_in_plan(plan, key), hint};
}

Result<std::size_t> find(const table::Table& table, const run::Plan& plan, const std::string& name,
                         const std::string& key) {
  if (const auto index = table.find(name)) return *index;
  return unknown_column(table, plan, name, key);
}

Status check_names(const table::Table& table, const run::Plan& plan) {
  const auto check = [&](const std::string& name, const std::string& key) -> Status {
    const auto found = find(table, plan, name, key);
    return found ? Status() : Status(found.error());
  };
  for (const auto& name : plan.data.ignore)
    if (auto status = check(name, "data.ignore"); !status) return status;
  for (const auto& name : plan.data.text)
    if (auto status = check(name, "data.text"); !status) return status;
  for (const auto& [name, bounds] : plan.data.bounds)
    if (auto status = check(name, "data.bounds"); !status) return status;
  for (const auto& name : plan.forms.always)
    if (auto status = check(name, "forms.always"); !status) return status;
  for (const auto& [name, direction] : plan.forms.direction)
    if (auto status = check(name, "forms.direction"); !status) return status;
  for (const auto& [name, menu] : plan.forms.of)
    if (auto status = check(name, "forms.of"); !status) return status;
  return {};
}

Status assign_special(const table::Table& table, const run::Plan& plan, const std::optional<std::string>& name,
                      const std::string& key, std::optional<std::size_t>& role, std::set<std::size_t>& taken) {
  if (!name) return {};
  const auto index = find(table, plan, *name, key);
  if (!index) return index.error();
  if (!taken.insert(*index).second)
    return Error{ErrorKind::plan, "'" + key + "' names '" + *name + "', which already has another role",
                 where_in_plan(plan, key),
                 "give each of data.response, data.weight, data.group, data.order and data.fold its own column"};
  role = *index;
  return {};
}

/// A predictor that the plan names must not be used up by another role.
Status check_predictor(const table::Table& table, const run::Plan& plan, const Roles& roles, const std::string& name,
                       const std::string& key) {
  const std::size_t index = *table.find(name);
  if (std::find(roles.predictors.begin(), roles.predictors.end(), index) != roles.predictors.end()) return {};
  return Error{
      ErrorKind::plan,
      "'" + key + "' names '" + name + "', which is not a predictor: the plan ignores it or gives it another role",
      where_in_plan(plan, key), "take it out of " + key + ", or out of the other place in the plan"};
}

}  // namespace

std::string where_in_plan(const run::Plan& plan, const std::string& key) {
  const auto found = plan.where.find(key);
  return found == plan.where.end() ? plan.path : found->second;
}

Result<Roles> assign_roles(const table::Table& table, const run::Plan& plan) {
  if (plan.data.response.empty())
    return Error{ErrorKind::plan, "no response column is named", plan.path,
                 "set data.response in the plan, or add --response COLUMN"};
  if (auto status = check_names(table, plan); !status) return status.error();
  Roles roles;
  const auto response = find(table, plan, plan.data.response, "data.response");
  if (!response) return response.error();
  roles.response = *response;
  std::set<std::size_t> taken = {roles.response};
  if (auto status = assign_special(table, plan, plan.data.weight, "data.weight", roles.weight, taken); !status)
    return status.error();
  if (auto status = assign_special(table, plan, plan.data.group, "data.group", roles.group, taken); !status)
    return status.error();
  if (auto status = assign_special(table, plan, plan.data.order, "data.order", roles.order, taken); !status)
    return status.error();
  if (auto status = assign_special(table, plan, plan.data.fold, "data.fold", roles.fold, taken); !status)
    return status.error();
  for (const auto& name : plan.data.ignore) taken.insert(*table.find(name));
  for (std::size_t i = 0; i < table.columns.size(); ++i)
    if (!taken.contains(i)) roles.predictors.push_back(i);
  for (const auto& name : plan.forms.always)
    if (auto status = check_predictor(table, plan, roles, name, "forms.always"); !status) return status.error();
  for (const auto& [name, menu] : plan.forms.of)
    if (auto status = check_predictor(table, plan, roles, name, "forms.of"); !status) return status.error();
  for (const auto& [name, direction] : plan.forms.direction)
    if (auto status = check_predictor(table, plan, roles, name, "forms.direction"); !status) return status.error();
  return roles;
}

}  // namespace formsieve::pipeline

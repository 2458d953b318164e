#include "run/plan_rules.hpp"

#include "run/plan_values.hpp"

#include <algorithm>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::run {

namespace {

bool lists(const std::vector<std::string>& names, const std::string& name) {
  return std::find(names.begin(), names.end(), name) != names.end();
}

/// Says that a required key is missing, at its table when there is one.
void require_text(const std::string& value, const std::string& table, const std::string& key, Findings& findings) {
  if (!value.empty()) return;
  const std::string dotted = table + "." + key;
  findings.refuse_key(table, dotted + " is missing", write_hint(dotted) + " under [" + table + "]");
}

void check_fold_kind(const Plan& plan, Findings& findings) {
  const std::vector<std::pair<const char*, const std::optional<std::string>*>> kinds{
      {"data.group", &plan.data.group}, {"data.order", &plan.data.order}, {"data.fold", &plan.data.fold}};
  std::string first;
  for (const auto& [key, column] : kinds) {
    if (!column->has_value()) continue;
    if (!first.empty())
      findings.refuse_key(key,
                          std::string(key) + " and " + first + " exclude one another: each says how to cut the folds",
                          "keep one of group, order and fold");
    if (first.empty()) first = key;
  }
  const char* fixed = plan.data.order ? "data.order" : plan.data.fold ? "data.fold" : nullptr;
  if (fixed != nullptr && plan.search.repeats > 1)
    findings.refuse_key("search.repeats",
                        "search.repeats is " + std::to_string(plan.search.repeats) + ", but " + fixed +
                            " fixes the folds: every repeat would be the same",
                        "write repeats = 1");
}

void check_response(const Plan& plan, Findings& findings) {
  const std::string& response = plan.data.response;
  if (response.empty()) return;
  const auto clash = [&](bool when, const std::string& key, const std::string& place) {
    if (when)
      findings.refuse_key(place, key + " names the response '" + response + "'",
                          "take '" + response + "' out of " + key);
  };
  clash(lists(plan.data.ignore, response), "data.ignore", "data.ignore." + response);
  clash(lists(plan.data.text, response), "data.text", "data.text." + response);
  clash(lists(plan.forms.always, response), "forms.always", "forms.always." + response);
  clash(plan.forms.direction.contains(response), "forms.direction", "forms.direction." + response);
  clash(plan.data.weight == response, "data.weight", "data.weight");
  clash(plan.data.group == response, "data.group", "data.group");
  clash(plan.data.order == response, "data.order", "data.order");
  clash(plan.data.fold == response, "data.fold", "data.fold");
  if (plan.forms.of.contains(response))
    findings.refuse_key("forms.of." + response, "forms.of names the response '" + response + "'",
                        R"(its forms stand in forms.response, as in response = ["identity", "ln"])");
}

/// A column that is ignored cannot also be asked for.
void check_ignored(const Plan& plan, Findings& findings) {
  for (const std::string& column : plan.data.ignore) {
    const auto clash = [&](bool when, const std::string& key) {
      if (when)
        findings.refuse_key(key + "." + column, key + " names '" + column + "', which data.ignore leaves out",
                            "take '" + column + "' out of one of the two");
    };
    clash(lists(plan.forms.always, column), "forms.always");
    clash(plan.forms.direction.contains(column), "forms.direction");
    clash(plan.forms.of.contains(column), "forms.of");
  }
}

/// Text columns enter as level indicators: nothing rises or falls, and no bound holds.
void check_text(const Plan& plan, Findings& findings) {
  for (const std::string& column : plan.data.text) {
    const auto clash = [&](bool when, const std::string& key) {
      if (when)
        findings.refuse_key(key + "." + column, key + " names '" + column + "', which data.text makes a text column",
                            "take '" + column + "' out of one of the two");
    };
    clash(plan.forms.direction.contains(column), "forms.direction");
    clash(plan.data.bounds.contains(column), "data.bounds");
  }
  if (plan.data.weight && lists(plan.data.text, *plan.data.weight))
    findings.refuse_key("data.weight", "data.weight names '" + *plan.data.weight + "', which data.text makes text",
                        "take it out of data.text: weights are numbers");
}

void check_terms(const Plan& plan, Findings& findings) {
  if (!plan.search.max_terms || plan.forms.always.size() <= *plan.search.max_terms) return;
  findings.refuse_key("search.max_terms",
                      "search.max_terms is " + std::to_string(*plan.search.max_terms) + ", but forms.always names " +
                          std::to_string(plan.forms.always.size()) + " columns that are in every candidate",
                      "write max_terms = " + std::to_string(plan.forms.always.size()) + " or more");
}

void check_dialect(const Plan& plan, Findings& findings) {
  if (plan.data.separator == "comma" && plan.data.decimal == "comma")
    findings.refuse_key("data.decimal", "data.decimal and data.separator are both a comma",
                        R"(write separator = "semicolon", or decimal = "point")");
}

}  // namespace

void check_rules(const Plan& plan, Findings& findings) {
  check_fold_kind(plan, findings);
  check_response(plan, findings);
  check_ignored(plan, findings);
  check_text(plan, findings);
  check_terms(plan, findings);
  check_dialect(plan, findings);
  // What is absent stands nowhere: said only when all that is there is right, since a misspelt key explains it better.
  if (!findings.clean()) return;
  require_text(plan.data.file, "data", "file", findings);
  require_text(plan.data.response, "data", "response", findings);
}

}  // namespace formsieve::run

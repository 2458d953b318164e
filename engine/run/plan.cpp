// Reading a plan: TOML, then its four tables, then what they say about one another.
#include <formsieve/run.hpp>

#include "run/duration.hpp"
#include "run/file_io.hpp"
#include "run/plan_findings.hpp"
#include "run/plan_forms.hpp"
#include "run/plan_rules.hpp"
#include "run/plan_settings.hpp"
#include "run/plan_values.hpp"

#include <toml++/toml.h>

#include <charconv>
#include <cmath>
#include <cstdint>
#include <string>
#include <string_view>

namespace formsieve::run {

namespace {

// A plan is a page of text; anything larger is some other file.
constexpr std::size_t kLargestPlanBytes = 8u << 20;

void read_bounds(TableReader& data, Plan::Data& out) {
  data.columns("bounds", [&](const std::string& column, const toml::node& node) {
    const std::string key = "data.bounds." + column;
    const toml::array* pair = node.as_array();
    const auto lower = pair != nullptr && pair->size() == 2 ? number_in(*pair->get(0)) : std::nullopt;
    const auto upper = pair != nullptr && pair->size() == 2 ? number_in(*pair->get(1)) : std::nullopt;
    if (!lower || !upper)
      data.findings().refuse(node.source().begin, key + " must be a list of two numbers, the lowest and the highest",
                             "write bounds = { " + column + " = [0, 100] }; an open side is -inf or inf");
    else if (!(*lower < *upper))
      data.findings().refuse(node.source().begin,
                             key + " runs from " + number_text(*lower) + " to " + number_text(*upper) +
                                 ", and the lowest must be below the highest",
                             "write bounds = { " + column + " = [0, 100] }");
    else
      out.bounds.emplace(column, std::pair{*lower, *upper});
  });
}

void read_data(const toml::table& table, Plan::Data& out, Findings& findings) {
  TableReader data(table, "data", findings);
  data.text("file", out.file);
  data.text("query", out.query);
  data.text("response", out.response);
  data.texts("ignore", false, out.ignore);
  data.text("weight", out.weight);
  data.text("group", out.group);
  data.text("order", out.order);
  data.text("fold", out.fold);
  read_bounds(data, out);
  data.choice("separator", {"comma", "semicolon", "tab"}, out.separator);
  data.choice("decimal", {"point", "comma"}, out.decimal);
  if (data.find("missing") != nullptr) data.texts("missing", true, out.missing.emplace());
  data.texts("text", false, out.text);
  data.count("rare_levels", 0, out.rare_levels);
}

/// A menu, or the word "survey" for the menus that the survey suggests.
void read_menu_or_survey(TableReader& forms, const std::string& key, std::optional<std::vector<FormEntry>>& out) {
  const toml::node* node = forms.find(key);
  if (node == nullptr || node->value_exact<std::string>() == "survey") return;
  if (!node->is_array()) return forms.refuse_value(key, *node, "\"survey\" or a list of forms");
  out = read_menu(*node, forms.dotted(key), forms.findings());
}

void read_directions(TableReader& forms, Plan::Forms& out) {
  forms.columns("direction", [&](const std::string& column, const toml::node& node) {
    const auto word = node.value_exact<std::string>();
    if (word == "rising" || word == "falling") {
      out.direction.emplace(column, *word);
      return;
    }
    forms.findings().refuse(node.source().begin,
                            "forms.direction." + column + " is " + shown(node) + ", and must be rising or falling",
                            "write direction = { " + column + " = \"rising\" }");
  });
}

void read_forms(const toml::table& table, Plan::Forms& out, Findings& findings) {
  TableReader forms(table, "forms", findings);
  read_menu_or_survey(forms, "response", out.response);
  read_menu_or_survey(forms, "default", out.default_menu);
  forms.texts("always", false, out.always);
  read_directions(forms, out);
  forms.columns("of", [&](const std::string& column, const toml::node& node) {
    out.of.emplace(column, read_menu(node, "forms.of." + column, findings));
  });
}

/// TOML integers end at 2^63 − 1; larger seeds are written as text.
void read_seed(TableReader& search, std::uint64_t& out) {
  const toml::node* node = search.find("seed");
  if (node == nullptr) return;
  const auto whole = node->value_exact<std::int64_t>();
  if (whole && *whole >= 0) {
    out = static_cast<std::uint64_t>(*whole);
    return;
  }
  if (const auto text = node->value_exact<std::string>()) {
    const char* end = text->data() + text->size();
    std::uint64_t value = 0;
    const auto [stop, code] = std::from_chars(text->data(), end, value);
    if (code == std::errc() && stop == end) {
      out = value;
      return;
    }
  }
  search.refuse_value("seed", *node, "a whole number from 0 to 2^64 − 1 (in quotes beyond 2^63 − 1)");
}

void read_budget(TableReader& search, double& out) {
  const toml::node* node = search.find("budget");
  if (node == nullptr) return;
  const auto refuse = [&](const std::string& why, const std::string& hint) {
    search.findings().refuse(node->source().begin, "search.budget: " + why, hint);
  };
  if (const auto text = node->value_exact<std::string>()) {
    const auto seconds = parse_duration(*text);
    if (seconds)
      out = *seconds;
    else
      refuse(seconds.error().message, seconds.error().hint);
    return;
  }
  const auto seconds = number_in(*node);
  if (seconds && *seconds > 0.0 && *seconds <= kLongestBudgetSeconds)
    out = *seconds;
  else
    refuse(shown(*node) + " is not a duration from above 0 to ten years", write_hint("search.budget"));
}

void read_search(const toml::table& table, Plan::Search& out, Findings& findings) {
  TableReader search(table, "search", findings);
  search.choice("strategy", {"auto", "every", "proved", "guided"}, out.strategy);
  search.count("max_terms", 0, out.max_terms);
  search.number(
      "within", [](double x) { return std::isfinite(x) && x >= 0.0; }, "from 0", out.within);
  search.count("folds", 2, out.folds);
  search.count("repeats", 1, out.repeats);
  read_seed(search, out.seed);
  search.count("pool", 1, out.pool);
  read_budget(search, out.budget_seconds);
}

void read_rank(const toml::table& table, Plan::Rank& out, Findings& findings) {
  TableReader rank(table, "rank", findings);
  rank.choice("by", {"cv_rmse", "aic", "aicc", "bic"}, out.by);
  rank.count("shortlist", 1, out.shortlist);
  rank.number(
      "near_tie", [](double x) { return x >= 0.0 && x < 1.0; }, "from 0 to below 1", out.near_tie);
  rank.texts("require", false, out.require);
  rank.yes_or_no("families", out.families);
}

void read_tables(const toml::table& root, Plan& plan, Findings& findings) {
  const TableReader top(root, "", findings);
  const auto section = [&](const std::string& name, auto&& read) {
    const toml::node* node = root.get(name);
    if (node == nullptr) return;
    if (const toml::table* table = node->as_table()) return read(*table);
    findings.refuse_key(name, name + " is " + shown(*node) + ", and must be a table",
                        "write [" + name + "] on a line of its own");
  };
  section("data", [&](const toml::table& t) { read_data(t, plan.data, findings); });
  section("forms", [&](const toml::table& t) { read_forms(t, plan.forms, findings); });
  section("search", [&](const toml::table& t) { read_search(t, plan.search, findings); });
  section("rank", [&](const toml::table& t) { read_rank(t, plan.rank, findings); });
}

/// How to mend the commonest slips of TOML.
std::string syntax_hint(std::string_view description) {
  const auto says = [&](std::string_view words) { return description.find(words) != std::string_view::npos; };
  if (says("redefine")) return "a key or table may stand once: delete one of the two";
  if (says("utf-8") || says("UTF-8")) return "save the plan as UTF-8 text";
  if (says("parsing string")) return "close the text with the quote that opened it, on the same line";
  if (says("parsing array")) return "close the list with ], entries parted by commas";
  if (says("parsing value") || says("value type")) return R"(put text in double quotes, as in by = "aic")";
  return R"(one key = value a line; text in double quotes, as in by = "aic"; lists in brackets)";
}

/// "Error while parsing array: encountered end-of-file" is said as "the plan is not valid TOML (array): …".
std::string syntax_message(std::string_view description) {
  constexpr std::string_view kLead = "Error while parsing ";
  std::string message = "the plan is not valid TOML";
  const std::size_t colon = description.find(": ");
  if (!description.starts_with(kLead) || colon == std::string_view::npos)
    return message.append(": ").append(description);
  message.append(" (").append(description.substr(kLead.size(), colon - kLead.size())).append(")");
  return message.append(description.substr(colon));
}

Error syntax_error(const toml::parse_error& error, const Findings& findings) {
  const std::string_view description = error.description();
  return {ErrorKind::plan, syntax_message(description), findings.where(error.source().begin), syntax_hint(description)};
}

}  // namespace

Result<Plan> parse_plan(const std::string& text, const std::string& path) {
  Findings findings(path);
  Plan plan;
  plan.path = path;
  try {
    const toml::table root = toml::parse(std::string_view(text), std::string_view(path));
    read_tables(root, plan, findings);
  } catch (const toml::parse_error& error) {
    return syntax_error(error, findings);
  }
  check_rules(plan, findings);
  if (!findings.clean()) return findings.earliest();
  plan.where = findings.all_places();
  return plan;
}

Result<Plan> read_plan(const std::string& path) {
  auto text = read_file(path, kLargestPlanBytes);
  if (!text) return text.error();
  return parse_plan(*text, path);
}

}  // namespace formsieve::run

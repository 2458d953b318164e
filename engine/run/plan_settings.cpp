#include "run/plan_settings.hpp"

#include <formsieve/run.hpp>

#include <algorithm>

namespace formsieve::run {

namespace {

constexpr Setting kSettings[] = {
    {"data", "file", R"(file = "coldstores.csv")"},
    {"data", "query", R"(query = "select * from stores")"},
    {"data", "response", R"(response = "energy_kwh")"},
    {"data", "ignore", R"(ignore = ["site_id"])"},
    {"data", "weight", R"(weight = "hours_metered")"},
    {"data", "group", R"(group = "operator")"},
    {"data", "order", R"(order = "month")"},
    {"data", "fold", R"(fold = "fold_no")"},
    {"data", "bounds", R"(bounds = { fill_percent = [0, 100] })"},
    {"data", "separator", R"(separator = "semicolon")"},
    {"data", "decimal", R"(decimal = "comma")"},
    {"data", "missing", R"(missing = ["", "NA"])"},
    {"data", "text", R"(text = ["site_code"])"},
    {"data", "rare_levels", R"(rare_levels = 5)"},
    {"forms", "response", R"(response = ["identity", "sqrt", "ln"])"},
    {"forms", "default", R"(default = "survey")"},
    {"forms", "always", R"(always = ["floor_area"])"},
    {"forms", "direction", R"(direction = { floor_area = "rising" })"},
    {"forms", "of", R"(of.floor_area = ["identity", "sqrt", "ln"])"},
    {"search", "strategy", R"(strategy = "auto")"},
    {"search", "max_terms", R"(max_terms = 8)"},
    {"search", "within", R"(within = 4)"},
    {"search", "folds", R"(folds = 10)"},
    {"search", "repeats", R"(repeats = 1)"},
    {"search", "seed", R"(seed = 20261201)"},
    {"search", "pool", R"(pool = 2000)"},
    {"search", "budget", R"(budget = "8h")"},
    {"rank", "by", R"(by = "cv_rmse")"},
    {"rank", "shortlist", R"(shortlist = 25)"},
    {"rank", "near_tie", R"(near_tie = 0.02)"},
    {"rank", "require", R"(require = ["equal-spread"])"},
    {"rank", "families", R"(families = true)"},
};

/// The tables other than `table` that have this very key, "[data] or [forms]".
std::string homes_of(std::string_view table, const std::string& key) {
  std::string homes;
  for (const Setting& setting : kSettings) {
    if (setting.key != key || setting.table == table) continue;
    homes += (homes.empty() ? "[" : " or [") + std::string(setting.table) + "]";
  }
  return homes;
}

std::string holdings(std::string_view table) {
  if (table.empty()) return "a plan has the tables [data], [forms], [search] and [rank]";
  std::string text = "[";
  return text.append(table).append("] holds ").append(comma_list(keys_of(table)));
}

}  // namespace

std::span<const Setting> settings() { return kSettings; }

std::vector<std::string> table_names() { return {"data", "forms", "search", "rank"}; }

std::vector<std::string> keys_of(std::string_view table) {
  std::vector<std::string> keys;
  for (const Setting& setting : kSettings)
    if (setting.table == table) keys.emplace_back(setting.key);
  return keys;
}

std::string_view example_of(std::string_view dotted_key) {
  for (const Setting& setting : kSettings) {
    const std::string name = std::string(setting.table) + "." + std::string(setting.key);
    if (dotted_key == name || dotted_key.starts_with(name + ".")) return setting.example;
  }
  return {};
}

std::string unknown_key_hint(std::string_view table, const std::string& key) {
  const auto near = nearest(key, table.empty() ? table_names() : keys_of(table));
  const std::string homes = homes_of(table, key);
  const std::string facts = homes.empty() ? holdings(table) : "'" + key + "' belongs in " + homes;
  return near ? "did you mean '" + *near + "'? (" + facts + ")" : facts;
}

std::string comma_list(const std::vector<std::string>& words) {
  std::string out;
  for (const std::string& word : words) out += (out.empty() ? "" : ", ") + word;
  return out;
}

}  // namespace formsieve::run

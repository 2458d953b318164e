// The settings that a plan may hold, one line each: the single place from which unknown keys are recognised and hints
// take the literal setting to type. Private to room run.
#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::run {

struct Setting {
  std::string_view table;    ///< "data"
  std::string_view key;      ///< "separator"
  std::string_view example;  ///< a line that is valid as it stands, "separator = \"semicolon\""
};

/// All settings, in the order of the plan.
std::span<const Setting> settings();

/// The tables of a plan, in its order.
std::vector<std::string> table_names();

/// The keys of one table, in the plan's order.
std::vector<std::string> keys_of(std::string_view table);

/// The example line of "table.key"; empty when there is no such setting.
std::string_view example_of(std::string_view dotted_key);

/// What to say about a key that `table` does not have: the table it belongs to, else the nearest key, and what the
/// table holds. An empty `table` is the top level of the plan.
std::string unknown_key_hint(std::string_view table, const std::string& key);

/// "cv_rmse, aic, aicc, bic"
std::string comma_list(const std::vector<std::string>& words);

}  // namespace formsieve::run

// The arguments of the commands as records, the options that fill them, and how they become a plan. One table of
// options (the calls to add_option below) feeds parsing and help.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/run.hpp>

#include <CLI/CLI.hpp>

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::cli {

/// Options of every command.
struct CommonArguments {
  bool json = false;
  unsigned threads = 0;  ///< 0: all that the process may use
};

/// How the table is written; unset members are found out, or as the plan says.
struct TableArguments {
  std::optional<std::string> separator, decimal, query;
  std::vector<std::string> missing, text;
};

/// What a search may be told without a plan, or in place of the plan's own keys.
struct PlanArguments {
  std::optional<std::string> response, weight, group, order, fold, by, budget, strategy;
  std::vector<std::string> ignore;
  std::optional<std::uint64_t> folds, repeats, seed, max_terms, shortlist;
};

void add_common_options(CLI::App& command, CommonArguments& arguments);
/// --level SHARE: the nominal level of intervals.
void add_level_option(CLI::App& command, double& level);
void add_table_options(CLI::App& command, TableArguments& arguments);
void add_plan_options(CLI::App& command, PlanArguments& arguments);
void add_response_option(CLI::App& command, std::optional<std::string>& response, const std::string& description);

/// The group of the options that search lists in one line.
inline constexpr const char* kTableGroup = "how the table is written";

/// True for a name that ends in ".toml": a plan; everything else is a table.
bool names_a_plan(const std::string& path);

/// The plan file read, or a plan of nothing but defaults for a table. Errors: those of run::read_plan.
Result<run::Plan> plan_for(const std::string& plan_or_table);

/// Settings given on the command line take the place of the plan's; messages about them then point at the option.
void apply(const TableArguments& arguments, run::Plan& plan);
void apply(const PlanArguments& arguments, run::Plan& plan);

/// How the table was to be read: "separator found out from the file, decimal point, missing: empty, NA, …".
std::string settings_in_force(const run::Plan& plan);

/// "a,b" as a and b; a comma after a backslash belongs to the name.
std::vector<std::string> split_list(const std::vector<std::string>& given);

}  // namespace formsieve::cli

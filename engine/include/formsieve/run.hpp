// Room run: the plan, the run folder, budgets. Knows nothing of the terminal. May call: base, result types of judge.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::run {

/// A form as written in a plan; a list of parameters or shifts has been spread into several.
struct FormEntry {
  std::string form;
  std::vector<double> parameters;  ///< empty, one value, or two powers or a number of knots
  std::optional<double> reflect;
  bool reflect_auto = false;
  std::optional<double> shift;
  bool shift_auto = false;
  std::string where;  ///< "plan.toml:14:3", for messages; empty when it came from no file
};

/// Every setting of a search. Defaults are those of design.md; a plan file overrides them.
struct Plan {
  std::string path;  ///< of the plan file; empty when there is none. Relative data files are looked up beside it.

  struct Data {
    std::string file;
    std::optional<std::string> query;  ///< SQLite
    std::string response;
    std::vector<std::string> ignore;
    std::optional<std::string> weight, group, order, fold;
    std::map<std::string, std::pair<double, double>> bounds;
    std::optional<std::string> separator, decimal;  ///< "comma", "semicolon", "tab"; "point", "comma"
    std::optional<std::vector<std::string>> missing;
    std::vector<std::string> text;  ///< columns taken as text though they are numbers
    std::size_t rare_levels = 5;    ///< text levels seen on fewer rows are pooled
  } data;

  struct Forms {
    std::optional<std::vector<FormEntry>> response;      ///< unset: from the survey
    std::optional<std::vector<FormEntry>> default_menu;  ///< unset: "survey"
    std::vector<std::string> always;
    std::map<std::string, std::string> direction;      ///< column → "rising" | "falling"
    std::map<std::string, std::vector<FormEntry>> of;  ///< column → menu
  } forms;

  struct Search {
    std::string strategy = "auto";  ///< auto, every, proved, guided
    std::optional<std::size_t> max_terms;
    double within = 4.0;
    std::size_t folds = 10;
    std::size_t repeats = 1;
    std::uint64_t seed = 20261201;
    std::size_t pool = 2000;
    double budget_seconds = 8 * 3600.0;
  } search;

  struct Rank {
    std::string by = "cv_rmse";  ///< cv_rmse, aic, aicc, bic
    std::size_t shortlist = 25;
    double near_tie = 0.02;
    std::vector<std::string> require;  ///< names of checks
    bool families = true;              ///< candidates with nearly the same predictions are shown as one line
  } rank;

  std::map<std::string, std::string>
      where;  ///< plan key ("forms.always") → "plan.toml:9:1", for messages about it later
};

/// Reads and validates a plan file. Errors (kind plan): TOML syntax, unknown key (nearest known one named), wrong type,
/// value out of range, contradictory settings; each with file, line, column and key. Names of columns and forms are
/// checked later, against the table.
Result<Plan> read_plan(const std::string& path);
Result<Plan> parse_plan(const std::string& text, const std::string& path);

/// The plan as TOML with every setting written out; reading it back gives the same Plan.
std::string write_plan(const Plan& plan);

/// "8h", "90m", "45s", "1.5h", "2d" or a number of seconds.
Result<double> parse_duration(const std::string& text);

/// The known name with the smallest edit distance, if it is near enough to be a likely slip.
std::optional<std::string> nearest(const std::string& name, const std::vector<std::string>& known);

}  // namespace formsieve::run

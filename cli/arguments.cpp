#include "arguments.hpp"

#include "numbers.hpp"
#include "page.hpp"

#include <formsieve/table.hpp>

#include <algorithm>
#include <charconv>
#include <functional>
#include <limits>

namespace formsieve::cli {
namespace {

// A validator's message carries its remedy after a newline; usage_error.cpp takes them apart.
using Check = std::function<std::string(const std::string&)>;

constexpr std::uint64_t kMostThreads = 1024;
constexpr std::uint64_t kMost32 = std::numeric_limits<std::uint32_t>::max();

Check whole_number(std::uint64_t least, std::uint64_t most, const std::string& example) {
  return [=](const std::string& text) -> std::string {
    std::uint64_t value = 0;
    const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
    const bool whole = error == std::errc() && end == text.data() + text.size();
    if (whole && value >= least && value <= most) return {};
    const std::string upper = most < kMost32 ? " to " + grouped(std::to_string(most)) : " or more";
    return "'" + text + "' is not a whole number of " + std::to_string(least) + upper + "\nfor example " + example;
  };
}

Check one_of(const std::vector<std::string>& choices) {
  return [=](const std::string& text) -> std::string {
    if (std::find(choices.begin(), choices.end(), text) != choices.end()) return {};
    const std::optional<std::string> near = run::nearest(text, choices);
    const std::string all = "one of " + joined(choices, ", ");
    return "'" + text + "' is not known\n" + (near ? "did you mean " + *near + "? It is " : "give ") + all;
  };
}

std::string is_duration(const std::string& text) {
  const Result<double> seconds = run::parse_duration(text);
  return seconds ? std::string() : seconds.error().message + "\nfor example --budget 8h, 90m or 45s";
}

std::string is_level(const std::string& text) {
  double value = 0.0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  const bool number = error == std::errc() && end == text.data() + text.size();
  if (number && value > 0.0 && value < 1.0) return {};
  return "'" + text + "' is not a number between 0 and 1\nfor example --level 0.9";
}

// The last of several wins, as when an alias is overridden.
template <class T>
CLI::Option* add_single(CLI::App& command, const std::string& name, const std::string& type, T& value,
                        const std::string& description) {
  return command.add_option(name, value, description)
      ->type_name(type)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast);
}

void add_list(CLI::App& command, const std::string& name, const std::string& type, std::vector<std::string>& values,
              const std::string& description) {
  // One argument a time, so that a list never swallows the name of the table after it.
  command.add_option(name, values, description)
      ->type_name(type)
      ->expected(1)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll);
}

void override_text(run::Plan& plan, const char* key, const char* option, const std::optional<std::string>& given,
                   std::optional<std::string>& setting) {
  if (!given) return;
  setting = given;
  plan.where[key] = option;
}

template <class T>
void override_number(run::Plan& plan, const char* key, const char* option, const std::optional<std::uint64_t>& given,
                     T& setting) {
  if (!given) return;
  setting = static_cast<T>(*given);
  plan.where[key] = option;
}

}  // namespace

void add_common_options(CLI::App& command, CommonArguments& arguments) {
  add_single(command, "--threads", "N", arguments.threads, "threads to use; default all that are allowed")
      ->check(whole_number(1, kMostThreads, "--threads 2"));
  command.add_flag("--json", arguments.json, "the result as JSON on standard output");
}

void add_level_option(CLI::App& command, double& level) {
  add_single(command, "--level", "SHARE", level, "of the intervals; default 0.95")->check(is_level);
}

void add_table_options(CLI::App& command, TableArguments& arguments) {
  add_single(command, "--separator", "NAME", arguments.separator, "comma, semicolon or tab; default found out")
      ->check(one_of({"comma", "semicolon", "tab"}))
      ->group(kTableGroup);
  add_single(command, "--decimal", "NAME", arguments.decimal, "point or comma; default found out")
      ->check(one_of({"point", "comma"}))
      ->group(kTableGroup);
  add_list(command, "--missing", "CELL,…", arguments.missing,
           "cells that mean 'no value', beside empty ones; default NA,N/A,null,.,-");
  add_list(command, "--text", "COLUMN,…", arguments.text, "columns of numbers that are names, not amounts");
  command.get_option("--missing")->group(kTableGroup);
  command.get_option("--text")->group(kTableGroup);
  add_single(command, "--query", "SQL", arguments.query, "the rows to take from an SQLite database")
      ->group(kTableGroup);
}

void add_response_option(CLI::App& command, std::optional<std::string>& response, const std::string& description) {
  add_single(command, "--response", "COLUMN", response, description);
}

void add_plan_options(CLI::App& command, PlanArguments& arguments) {
  add_response_option(command, arguments.response, "what the equation shall predict");
  add_list(command, "--ignore", "COLUMN,…", arguments.ignore, "columns to leave out of the search");
  add_single(command, "--weight", "COLUMN", arguments.weight, "case weights");
  add_single(command, "--group", "COLUMN", arguments.group, "rows of one group stay in one fold");
  add_single(command, "--order", "COLUMN", arguments.order, "folds are blocks in this order");
  add_single(command, "--fold", "COLUMN", arguments.fold, "the fold of each row is given");
  add_single(command, "--folds", "N", arguments.folds, "folds of the cross-validation; default 10")
      ->check(whole_number(2, kMost32, "--folds 10"));
  add_single(command, "--repeats", "N", arguments.repeats, "times the rows are dealt into folds; default 1")
      ->check(whole_number(1, kMost32, "--repeats 3"));
  add_single(command, "--seed", "N", arguments.seed, "of the deal; the same seed, the same folds")
      ->check(whole_number(0, std::numeric_limits<std::int64_t>::max(), "--seed 7"));
  add_single(command, "--max-terms", "N", arguments.max_terms, "at most so many predictors in a candidate")
      ->check(whole_number(1, kMost32, "--max-terms 6"));
  add_single(command, "--strategy", "WAY", arguments.strategy, "auto (default), every, proved or guided")
      ->check(one_of({"auto", "every", "proved", "guided"}));
  add_single(command, "--by", "CRITERION", arguments.by, "rank by cv_rmse (default), aic, aicc or bic")
      ->check(one_of({"cv_rmse", "aic", "aicc", "bic"}));
  add_single(command, "--shortlist", "N", arguments.shortlist, "candidates to list; default 25")
      ->check(whole_number(1, kMost32, "--shortlist 25"));
  add_single(command, "--budget", "TIME", arguments.budget, "longest time it may take: 8h (default), 90m, 45s")
      ->check(is_duration);
}

bool names_a_plan(const std::string& path) {
  constexpr std::string_view kEnding = ".toml";
  if (path.size() < kEnding.size()) return false;
  std::string ending = path.substr(path.size() - kEnding.size());
  std::transform(ending.begin(), ending.end(), ending.begin(),
                 [](char letter) { return letter >= 'A' && letter <= 'Z' ? static_cast<char>(letter + 32) : letter; });
  return ending == kEnding;
}

Result<run::Plan> plan_for(const std::string& plan_or_table) {
  if (plan_or_table.empty()) {
    return Error{ErrorKind::usage, "the name of the table is empty", "", "name a file, as in formsieve survey DATA"};
  }
  if (names_a_plan(plan_or_table)) return run::read_plan(plan_or_table);
  run::Plan plan;
  plan.data.file = plan_or_table;
  return plan;
}

void apply(const TableArguments& arguments, run::Plan& plan) {
  override_text(plan, "data.separator", "--separator", arguments.separator, plan.data.separator);
  override_text(plan, "data.decimal", "--decimal", arguments.decimal, plan.data.decimal);
  override_text(plan, "data.query", "--query", arguments.query, plan.data.query);
  if (!arguments.missing.empty()) {
    plan.data.missing = split_list(arguments.missing);
    if (std::find(plan.data.missing->begin(), plan.data.missing->end(), "") == plan.data.missing->end()) {
      plan.data.missing->insert(plan.data.missing->begin(), "");
    }
    plan.where["data.missing"] = "--missing";
  }
  if (!arguments.text.empty()) {
    plan.data.text = split_list(arguments.text);
    plan.where["data.text"] = "--text";
  }
}

void apply(const PlanArguments& arguments, run::Plan& plan) {
  if (arguments.response) {
    plan.data.response = *arguments.response;
    plan.where["data.response"] = "--response";
  }
  if (!arguments.ignore.empty()) {
    plan.data.ignore = split_list(arguments.ignore);
    plan.where["data.ignore"] = "--ignore";
  }
  override_text(plan, "data.weight", "--weight", arguments.weight, plan.data.weight);
  override_text(plan, "data.group", "--group", arguments.group, plan.data.group);
  override_text(plan, "data.order", "--order", arguments.order, plan.data.order);
  override_text(plan, "data.fold", "--fold", arguments.fold, plan.data.fold);
  override_number(plan, "search.folds", "--folds", arguments.folds, plan.search.folds);
  override_number(plan, "search.repeats", "--repeats", arguments.repeats, plan.search.repeats);
  override_number(plan, "search.seed", "--seed", arguments.seed, plan.search.seed);
  override_number(plan, "search.max_terms", "--max-terms", arguments.max_terms, plan.search.max_terms);
  override_number(plan, "rank.shortlist", "--shortlist", arguments.shortlist, plan.rank.shortlist);
  if (arguments.by) {
    plan.rank.by = *arguments.by;
    plan.where["rank.by"] = "--by";
  }
  if (arguments.strategy) {
    plan.search.strategy = *arguments.strategy;
    plan.where["search.strategy"] = "--strategy";
  }
  if (arguments.budget) {
    plan.search.budget_seconds = run::parse_duration(*arguments.budget).value();  // checked while parsing
    plan.where["search.budget"] = "--budget";
  }
}

std::string settings_in_force(const run::Plan& plan) {
  const run::Plan::Data& data = plan.data;
  if (data.query) return "query: " + *data.query;
  const std::vector<std::string> missing = data.missing.value_or(table::CsvOptions{}.missing);
  std::vector<std::string> cells;
  for (const std::string& cell : missing) cells.push_back(cell.empty() ? "an empty cell" : cell);
  std::string text = "separator " + data.separator.value_or("found out from the file") + "; decimal " +
                     data.decimal.value_or("found out from the file") + "; missing: " + joined(cells, ", ");
  if (!data.text.empty()) text += "; text: " + joined(data.text, ", ");
  return text;
}

std::vector<std::string> split_list(const std::vector<std::string>& given) {
  std::vector<std::string> items;
  for (const std::string& text : given) {
    std::string item;
    for (std::size_t i = 0; i < text.size(); ++i) {
      if (text[i] == '\\' && i + 1 < text.size() && text[i + 1] == ',') {
        item += text[++i];
      } else if (text[i] == ',') {
        items.push_back(std::move(item));
        item.clear();
      } else {
        item += text[i];
      }
    }
    items.push_back(std::move(item));
  }
  return items;
}

}  // namespace formsieve::cli

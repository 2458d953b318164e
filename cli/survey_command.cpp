// formsieve survey DATA: profiles the columns of a table, or of the table that a plan names.
#include "commands.hpp"

#include "arguments.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "page.hpp"
#include "survey_view.hpp"
#include "terminal.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <algorithm>
#include <memory>

namespace formsieve::cli {
namespace {

struct SurveyArguments {
  std::string data;
  std::vector<std::string> columns;
  std::optional<std::string> response;
  TableArguments table;
  CommonArguments common;
};

// Keeps the columns that were asked for, in the table's order.
Status restrict_to(survey::Survey& survey, const std::vector<std::string>& wanted) {
  std::vector<std::string> known;
  for (const survey::ColumnProfile& profile : survey.columns) known.push_back(profile.facts.name);
  for (const std::string& name : wanted) {
    if (std::find(known.begin(), known.end(), name) != known.end()) continue;
    const std::optional<std::string> near = run::nearest(name, known);
    return Error{ErrorKind::usage, "--column names '" + name + "', which " + survey.file + " does not have", "",
                 near ? "did you mean --column " + *near + "?" : "its columns are " + joined(known, ", ")};
  }
  std::erase_if(survey.columns, [&](const survey::ColumnProfile& profile) {
    return std::find(wanted.begin(), wanted.end(), profile.facts.name) == wanted.end();
  });
  return {};
}

int run_survey(const SurveyArguments& arguments) {
  Result<run::Plan> plan = plan_for(arguments.data);
  if (!plan) return refused(plan.error(), {}, true);
  apply(arguments.table, *plan);
  if (arguments.response) {
    plan->data.response = *arguments.response;
    plan->where["data.response"] = "--response";
  }
  Result<survey::Survey> survey = pipeline::survey(*plan, arguments.common.threads);
  if (!survey) return refused(survey.error(), *plan);
  const std::vector<std::string> wanted = split_list(arguments.columns);
  if (!wanted.empty()) {
    if (const Status found = restrict_to(*survey, wanted); !found) return refused(found.error(), *plan);
  }
  if (arguments.common.json) return write_result(report::survey_json(*survey));
  return write_result(survey_page(*survey, look_at(kStandardOutput)));
}

}  // namespace

void add_survey_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<SurveyArguments>();
  CLI::App* command = program.add_subcommand("survey", "profiles the columns; says which forms are possible and why");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "survey DATA";
  help->notes = {"Lists take commas, or the option again: --text site,batch."};
  help->example = {"formsieve survey coldstores.csv --column fill_percent"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("DATA", arguments->data, "a table of delimited text, an SQLite database, or a plan (.toml)")
      ->required();
  command->add_option("--column", arguments->columns, "only these columns")
      ->type_name("COLUMN,…")
      ->expected(1)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll);
  add_response_option(*command, arguments->response, "show response forms for this column");
  add_table_options(*command, arguments->table);
  add_common_options(*command, arguments->common);
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_survey(*arguments); }; });
}

}  // namespace formsieve::cli

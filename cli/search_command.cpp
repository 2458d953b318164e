// formsieve search PLAN, or search DATA --response COLUMN: runs a search, prints the shortlist.
#include "commands.hpp"

#include "announcement_view.hpp"
#include "arguments.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "interrupt.hpp"
#include "numbers.hpp"
#include "output.hpp"
#include "page.hpp"
#include "progress_line.hpp"
#include "shortlist_view.hpp"
#include "terminal.hpp"
#include "words.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <memory>

namespace formsieve::cli {
namespace {

struct SearchArguments {
  std::string source;  ///< a plan or a table
  std::optional<std::string> out;
  bool replace = false;
  PlanArguments plan;
  TableArguments table;
  CommonArguments common;
};

Result<run::Plan> settled_plan(const SearchArguments& arguments) {
  Result<run::Plan> plan = plan_for(arguments.source);
  if (!plan) return plan;
  apply(arguments.table, *plan);
  apply(arguments.plan, *plan);
  if (!plan->data.response.empty()) return plan;
  const std::string source = shell_word(arguments.source);
  return Error{ErrorKind::usage, "the search does not know which column to predict", "",
               "add --response COLUMN; formsieve survey " + source + " lists the columns"};
}

// A sentence for standard error.
std::string to_reader(std::string_view sentence) {
  Page page(look_at(kStandardError));
  page.prose(sentence);
  return page.text();
}

void say_how_far(const pipeline::SearchOutcome& outcome) {
  const judge::Coverage& space = outcome.shortlist.space;
  (void)write_all(kStandardError, to_reader("Stopped early: " + grouped(space.scored) + " of " +
                                            grouped(space.candidates) + " candidates were scored. The run folder " +
                                            outcome.run_folder + " holds the shortlist of these."));
}

Result<pipeline::SearchOutcome> run_watched(const run::Plan& plan, const SearchArguments& arguments) {
  ProgressLine line(kStandardError, look_at(kStandardError).erases);
  StopOnSignal signals([&line] {
    line.message(to_reader("Stopping: what has been scored so far is examined. Press Ctrl-C again to quit at once."));
  });
  pipeline::SearchOptions options;
  options.out = arguments.out;
  options.replace = arguments.replace;
  options.threads = arguments.common.threads;
  options.progress = [&line](const Progress& progress) { line.update(progress); };
  options.announce = [&line](const pipeline::Announcement& announcement) {
    line.message(announcement_text(announcement, look_at(kStandardError)));
  };
  return pipeline::search(plan, options, signals.token());
}

int run_search(const SearchArguments& arguments) {
  const Result<run::Plan> plan = settled_plan(arguments);
  if (!plan) return refused(plan.error(), {}, true);
  const Result<pipeline::SearchOutcome> outcome = run_watched(*plan, arguments);
  if (!outcome) return refused(outcome.error(), *plan);
  const int code = outcome->stopped_early ? kStoppedEarly : kDone;
  if (outcome->stopped_early) say_how_far(*outcome);
  if (arguments.common.json) return write_result(report::shortlist_json(outcome->shortlist), code);
  return write_result(shortlist_page(outcome->shortlist, outcome->run_folder, look_at(kStandardOutput)), code);
}

}  // namespace

void add_search_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<SearchArguments>();
  CLI::App* command = program.add_subcommand("search", "tries every combination of forms and ranks the candidates");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "search PLAN | DATA --response COLUMN";
  help->brief_group = kTableGroup;
  help->brief_note = "As in formsieve survey";
  help->example = {"formsieve search coldstores.csv --response energy_kwh"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("PLAN|DATA", arguments->source, "a plan (.toml), whose keys options override, or a table")
      ->required();
  add_plan_options(*command, arguments->plan);
  command->add_option("--out", arguments->out, "the run folder; default the plan's or table's name + .run")
      ->type_name("FOLDER")
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast);
  command->add_flag("--replace", arguments->replace, "an existing run folder may be overwritten");
  add_table_options(*command, arguments->table);
  add_common_options(*command, arguments->common);
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_search(*arguments); }; });
}

}  // namespace formsieve::cli

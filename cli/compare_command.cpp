// formsieve compare RUN RANK RANK…: candidates side by side.
#include "commands.hpp"

#include "arguments.hpp"
#include "chosen_candidate.hpp"
#include "comparison_view.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "terminal.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <algorithm>
#include <memory>

namespace formsieve::cli {
namespace {

struct CompareArguments {
  std::string run_folder;
  std::vector<std::string> ranks;
  CommonArguments common;
};

// Names to ranks; two names that stand on one line are said to.
Result<std::vector<std::size_t>> ranks_of(const judge::Shortlist& shortlist, const std::vector<std::string>& wanted) {
  std::vector<std::size_t> ranks;
  for (const std::string& name : wanted) {
    const Result<const judge::Candidate*> found = find_candidate(shortlist, name);
    if (!found) return found.error();
    const std::size_t rank = (*found)->rank;
    if (std::find(ranks.begin(), ranks.end(), rank) != ranks.end()) {
      return Error{ErrorKind::usage, "'" + name + "' is rank " + std::to_string(rank) + ", which is named twice", "",
                   "name different candidates"};
    }
    ranks.push_back(rank);
  }
  return ranks;
}

int run_compare(const CompareArguments& arguments) {
  const Result<judge::Shortlist> shortlist = pipeline::open_run(arguments.run_folder);
  if (!shortlist) return refused(shortlist.error(), {}, true);
  const Result<std::vector<std::size_t>> ranks = ranks_of(*shortlist, arguments.ranks);
  if (!ranks) return refused(ranks.error(), {});
  const auto comparison = pipeline::compare(arguments.run_folder, *ranks, arguments.common.threads);
  if (!comparison) return refused(comparison.error(), {}, true);
  if (arguments.common.json) return write_result(report::comparison_json(*comparison));
  return write_result(comparison_page(*comparison, arguments.run_folder, look_at(kStandardOutput)));
}

}  // namespace

void add_compare_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<CompareArguments>();
  CLI::App* command = program.add_subcommand("compare", "sets candidates of a run side by side");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "compare RUN RANK RANK…";
  help->notes = {"The table of the run is read again; without it what the run folder holds is compared."};
  help->example = {"formsieve compare coldstores.run 1 4", "formsieve compare coldstores.run recommended simplest"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("RUN", arguments->run_folder, "the run folder of a search")->required();
  command
      ->add_option("RANK", arguments->ranks,
                   "two to five ranks or named lines: best, recommended, simplest, 'lowest AIC'")
      ->required()
      ->expected(1, -1);
  add_common_options(*command, arguments->common);
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_compare(*arguments); }; });
}

}  // namespace formsieve::cli

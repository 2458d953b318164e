// formsieve show RUN [RANK]: the shortlist of a run folder, or one candidate in full.
#include "commands.hpp"

#include "arguments.hpp"
#include "candidate_view.hpp"
#include "chosen_candidate.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "shortlist_view.hpp"
#include "terminal.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <memory>

namespace formsieve::cli {
namespace {

/// Columns of the line between two parts of a report.
constexpr std::size_t kRuleWidth = 80;

struct ShowArguments {
  std::string run_folder;
  std::optional<std::string> rank;
  bool profile = false;
  bool all = false;
  CommonArguments common;
};

int show_candidate(judge::Shortlist shortlist, const ShowArguments& arguments) {
  const Result<const judge::Candidate*> found = find_candidate(shortlist, *arguments.rank);
  if (!found) return refused(found.error(), {});
  if (!arguments.common.json) {
    return write_result(candidate_page(shortlist, **found, arguments.run_folder, look_at(kStandardOutput)));
  }
  judge::Candidate only = **found;
  shortlist.candidates.assign(1, std::move(only));
  return write_result(report::shortlist_json(shortlist));
}

// A report to be read or filed: the shortlist, the profile, every listed candidate.
std::string whole_report(const judge::Shortlist& shortlist, const ShowArguments& arguments) {
  const Terminal terminal = look_at(kStandardOutput);
  const std::string rule = "\n" + std::string(std::min(terminal.width, kRuleWidth), '=') + "\n\n";
  std::string text =
      shortlist_page(shortlist, arguments.run_folder, terminal) + rule + profile_page(shortlist, terminal);
  for (const judge::Candidate& candidate : shortlist.candidates)
    text += rule + candidate_page(shortlist, candidate, arguments.run_folder, terminal);
  return text;
}

int run_show(const ShowArguments& arguments) {
  const Result<judge::Shortlist> shortlist = pipeline::open_run(arguments.run_folder);
  if (!shortlist) return refused(shortlist.error(), {}, true);
  if (arguments.all && !arguments.common.json) return write_result(whole_report(*shortlist, arguments));
  if (arguments.profile && !arguments.common.json)
    return write_result(profile_page(*shortlist, look_at(kStandardOutput)));
  if (arguments.rank) return show_candidate(*shortlist, arguments);
  if (arguments.common.json) return write_result(report::shortlist_json(*shortlist));
  return write_result(shortlist_page(*shortlist, arguments.run_folder, look_at(kStandardOutput)));
}

}  // namespace

void add_show_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<ShowArguments>();
  CLI::App* command = program.add_subcommand("show", "prints the shortlist of a run, or one candidate in full");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "show RUN [RANK | --profile | --all]";
  help->example = {"formsieve show coldstores.run", "formsieve show coldstores.run recommended"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("RUN", arguments->run_folder, "the run folder of a search")->required();
  command->add_option("RANK", arguments->rank, "a rank, or a named line: best, recommended, simplest, 'lowest AIC'");
  command->add_flag("--profile", arguments->profile,
                    "what each form, each absence and each number of terms costs, of every predictor");
  command->add_flag("--all", arguments->all, "the whole report: shortlist, profile, every candidate listed in full");
  add_common_options(*command, arguments->common);
  command->get_option("--threads")->group("");  // taken for uniformity; nothing here could use a second thread
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_show(*arguments); }; });
}

}  // namespace formsieve::cli

// formsieve apply RUN RANK DATA: scores new rows by one candidate of a run folder.
#include "commands.hpp"

#include "arguments.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "interrupt.hpp"
#include "numbers.hpp"
#include "output.hpp"
#include "output_file.hpp"
#include "page.hpp"
#include "progress_line.hpp"
#include "terminal.hpp"

#include <formsieve/pipeline.hpp>

#include <cerrno>
#include <memory>
#include <system_error>

namespace formsieve::cli {
namespace {

struct ApplyArguments {
  std::string run_folder, rank, data;
  std::optional<std::string> out;
  bool replace = false;
  std::vector<std::string> keep;
  double level = 0.95;
  TableArguments table;
  CommonArguments common;
};

// How the table of the run was read, as far as it holds for another table: which cells mean "no value". Separator and
// decimal mark are found out anew.
Result<run::Plan> reading_plan(const ApplyArguments& arguments) {
  const Result<run::Plan> of_run = pipeline::open_plan(arguments.run_folder);
  if (!of_run) return of_run.error();
  run::Plan plan;
  plan.data.file = arguments.data == "-" ? "standard input" : arguments.data;
  plan.data.missing = of_run->data.missing;
  apply(arguments.table, plan);
  return plan;
}

pipeline::ApplyOptions options_for(const ApplyArguments& arguments, const run::Plan& plan) {
  pipeline::ApplyOptions options;
  options.source = plan.data.file;
  if (const auto& name = plan.data.separator) {
    options.csv.separator = *name == "tab" ? '\t' : *name == "semicolon" ? ';' : ',';
  }
  if (const auto& name = plan.data.decimal) options.csv.decimal = *name == "comma" ? ',' : '.';
  if (plan.data.missing) options.csv.missing = *plan.data.missing;
  options.keep = split_list(arguments.keep);
  options.level = arguments.level;
  options.json = arguments.common.json;
  options.threads = arguments.common.threads;
  return options;
}

// "1 row", "2,310 rows"
std::string rows_words(std::uint64_t n) { return grouped(std::to_string(n)) + (n == 1 ? " row" : " rows"); }

void say_what_happened(const pipeline::ApplySummary& summary) {
  Page page(look_at(kStandardError));
  std::string text = rows_words(summary.rows) + ", " + grouped(std::to_string(summary.scored)) + " scored, ";
  text += summary.flagged == 0 ? "none flagged" : grouped(std::to_string(summary.flagged)) + " flagged";
  std::vector<std::string> kinds;
  for (std::size_t bit = 0; bit < summary.by_flag.size(); ++bit) {
    if (summary.by_flag[bit] == 0) continue;
    kinds.push_back(std::string(model::flag_name(bit)) + " " + grouped(std::to_string(summary.by_flag[bit])));
  }
  if (!kinds.empty()) text += ": " + joined(kinds, ", ");
  page.prose(text + ".");
  if (!summary.has_normal) page.prose("The fit has no degrees of freedom left: there are no normal-theory intervals.");
  if (!summary.has_cross) page.prose("The fit has too few rows for CV+ intervals of this level.");
  (void)write_all(kStandardError, page.text());
}

Error cannot_write_out(int failure) {
  return {ErrorKind::io,
          "the scores could not be written to standard output: " + std::generic_category().message(failure), "",
          "make room there, or name a file with --out FILE"};
}

// A reader of standard output that has gone has what it wanted.
pipeline::TextSink sink_for(OutputFile* file) {
  if (file != nullptr) {
    return [file](std::string_view text) -> Result<bool> {
      if (const Status status = file->write(text); !status) return status.error();
      return true;
    };
  }
  return [](std::string_view text) -> Result<bool> {
    const int failure = write_all(kStandardOutput, text);
    if (failure != 0 && failure != EPIPE) return cannot_write_out(failure);
    return failure == 0;
  };
}

struct Scored {
  pipeline::ApplySummary summary;
  bool by_signal = false;  ///< ended by one, before the last row
};

Result<Scored> score(const ApplyArguments& arguments, const run::Plan& plan, const model::ModelSet& set,
                     const model::Model& model) {
  const Result<table::ByteStream> text = table::open_stream(arguments.data);
  if (!text) return text.error();
  std::optional<OutputFile> file;
  if (arguments.out) {
    Result<OutputFile> opened = OutputFile::open(*arguments.out, arguments.replace);
    if (!opened) return opened.error();
    file.emplace(*std::move(opened));
  }
  ProgressLine line(kStandardError, look_at(kStandardError).erases);
  StopOnSignal signals([] {});
  pipeline::ApplyOptions options = options_for(arguments, plan);
  options.progress = [&line](const Progress& progress) { line.update(progress); };
  auto summary = pipeline::apply(set, model, *text, options, sink_for(file ? &*file : nullptr), signals.token());
  if (!summary) return summary.error();
  const Scored scored{*summary, summary->stopped_early && signals.token().stop_requested()};
  // A file is complete or not there at all.
  if (!file || scored.by_signal) return scored;
  if (const Status status = file->finish(""); !status) return status.error();
  return scored;
}

int run_apply(const ApplyArguments& arguments) {
  const Result<model::ModelSet> set = pipeline::open_models(arguments.run_folder);
  if (!set) return refused(set.error(), {}, true);
  const Result<const model::Model*> model = pipeline::find_model(*set, arguments.rank);
  if (!model) return refused(model.error(), {}, true);
  const Result<run::Plan> plan = reading_plan(arguments);
  if (!plan) return refused(plan.error(), {}, true);
  const Result<Scored> scored = score(arguments, *plan, *set, **model);
  if (!scored) return refused(scored.error(), *plan);
  say_what_happened(scored->summary);
  if (!scored->by_signal) return kDone;
  (void)write_all(kStandardError, arguments.out ? "Stopped early: no file was written.\n"
                                                : "Stopped early: the rows that follow were not scored.\n");
  return kStoppedEarly;
}

}  // namespace

void add_apply_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<ApplyArguments>();
  CLI::App* command = program.add_subcommand("apply", "scores new rows: mean, intervals, flags");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "apply RUN RANK DATA";
  help->notes = {"Writes mean, median, two intervals and flags for each row; what cannot be said is left empty."};
  help->example = {"formsieve apply coldstores.run recommended new.csv --keep store"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("RUN", arguments->run_folder, "the run folder of a search")->required();
  command->add_option("RANK", arguments->rank, "a rank, or a named line: best, recommended, simplest, 'lowest AIC'")
      ->required();
  command
      ->add_option("DATA", arguments->data,
                   "a table of delimited text with the columns of the model; - reads standard input")
      ->required();
  command->add_option("--keep", arguments->keep, "columns of the table to copy in front of the scores")
      ->type_name("COLUMN,…")
      ->expected(1)
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll);
  command->add_option("--out", arguments->out, "a file to write instead of standard output")
      ->type_name("FILE")
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast);
  command->add_flag("--replace", arguments->replace, "an existing file may be overwritten");
  add_level_option(*command, arguments->level);
  add_table_options(*command, arguments->table);
  for (const char* other : {"--text", "--query"}) command->remove_option(command->get_option(other));
  add_common_options(*command, arguments->common);
  command->get_option("--json")->description("one JSON object a row instead of CSV");
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_apply(*arguments); }; });
}

}  // namespace formsieve::cli

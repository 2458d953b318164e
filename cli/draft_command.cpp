// formsieve draft DATA --response COLUMN: writes a commented plan from the survey, to be edited.
#include "commands.hpp"

#include "arguments.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "json_text.hpp"
#include "output.hpp"
#include "output_file.hpp"
#include "terminal.hpp"
#include "words.hpp"

#include <formsieve/pipeline.hpp>

#include <filesystem>
#include <memory>

namespace formsieve::cli {
namespace {

struct DraftArguments {
  std::string data;
  std::optional<std::string> response, out;
  bool replace = false;
  TableArguments table;
  CommonArguments common;
};

// A plan looks for its table beside itself: with --out in another folder the table's name is made relative to it.
void settle_names(const std::optional<std::string>& out, run::Plan& plan) {
  namespace fs = std::filesystem;
  if (!out) return;
  plan.path = *out;
  const fs::path folder = fs::path(*out).parent_path(), data(plan.data.file);
  if (folder.empty() || data.is_absolute()) return;
  std::error_code failure;
  const fs::path relative = fs::relative(data, folder, failure);
  if (!failure && !relative.empty()) plan.data.file = relative.generic_string();
}

int run_draft(const DraftArguments& arguments) {
  if (names_a_plan(arguments.data)) {
    return refused({ErrorKind::usage, "draft starts from a table, and " + arguments.data + " is a plan already", "",
                    "write formsieve search " + shell_word(arguments.data) + ", or draft from its table"},
                   {});
  }
  Result<run::Plan> settled = plan_for(arguments.data);
  if (!settled) return refused(settled.error(), {});
  run::Plan& plan = *settled;
  plan.data.response = *arguments.response;
  plan.where["data.response"] = "--response";
  apply(arguments.table, plan);
  OutputFile file;
  if (arguments.out) {
    Result<OutputFile> opened = OutputFile::open(*arguments.out, arguments.replace);
    if (!opened) return refused(opened.error(), {});
    file = std::move(*opened);
  }
  settle_names(arguments.out, plan);
  const Result<std::string> text = pipeline::draft(plan, arguments.common.threads);
  if (!text) return refused(text.error(), plan);
  if (arguments.out) {
    if (const Status written = file.finish(*text); !written) return refused(written.error(), {});
    const std::string next = "formsieve search " + shell_word(*arguments.out);
    (void)write_all(kStandardError, "The plan is in " + *arguments.out + ". Edit it, then type\n  " + next + "\n");
  }
  if (arguments.common.json) return write_result("{\"plan\": " + json_text(*text) + "}\n");
  return arguments.out ? kDone : write_result(*text);
}

}  // namespace

void add_draft_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<DraftArguments>();
  CLI::App* command = program.add_subcommand("draft", "writes a commented plan from the survey, to be edited");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "draft DATA --response COLUMN";
  help->notes = {"The plan goes to standard output unless --out names a file. It runs as it is."};
  help->example = {"formsieve draft coldstores.csv --response energy_kwh --out coldstores.toml"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("DATA", arguments->data, "a table of delimited text, or an SQLite database")->required();
  add_response_option(*command, arguments->response, "what the equation shall predict");
  command->get_option("--response")->required();
  command->add_option("--out", arguments->out, "the file to write; an existing one is kept")
      ->type_name("FILE")
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast);
  command->add_flag("--replace", arguments->replace, "an existing file may be overwritten");
  add_table_options(*command, arguments->table);
  add_common_options(*command, arguments->common);
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_draft(*arguments); }; });
}

}  // namespace formsieve::cli

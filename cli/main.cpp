// The program formsieve: arguments → the action of one command → exit code.
#include "commands.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "output.hpp"
#include "terminal.hpp"
#include "usage_error.hpp"

#include <formsieve/base.hpp>

#include <cstdlib>
#include <exception>
#include <new>
#include <string>
#include <vector>

namespace formsieve::cli {
namespace {

int refuse(const Error& error) {
  print_error(error);
  return kBadUsage;
}

const CLI::App& command_in_hand(const CLI::App& program) {
  const std::vector<CLI::App*> parsed = program.get_subcommands();
  return parsed.empty() ? program : *parsed.front();
}

std::string version_text() {
  return std::string("formsieve ") + version() + "\ninstruction set: " + base::instruction_set();
}

/// The variable FORMSIEVE_INSTRUCTIONS makes the kernels run with a lesser instruction set, as on a lesser processor.
Status take_instruction_set() {
  const char* name = std::getenv("FORMSIEVE_INSTRUCTIONS");
  if (name == nullptr || *name == '\0') return {};
  Status status = base::force_instruction_set(name);
  if (status) return status;
  Error error = status.error();
  error.where = "environment variable FORMSIEVE_INSTRUCTIONS";
  return error;
}

int run(int argc, char** argv) {
  if (const Status status = take_instruction_set(); !status) return refuse(status.error());
  CLI::App program("searches the functional forms of a regression and defends a shortlist", "formsieve");
  program.formatter(std::make_shared<ProgramHelp>());
  program.set_help_flag("--help,-h", "this page");
  program.set_version_flag("--version", version_text());
  program.require_subcommand(1);
  Action chosen;
  add_survey_command(program, chosen);
  add_draft_command(program, chosen);
  add_search_command(program, chosen);
  add_show_command(program, chosen);
  add_apply_command(program, chosen);
  add_compare_command(program, chosen);
  add_equation_command(program, chosen);

  const std::vector<std::string> arguments(argv + 1, argv + argc);
  if (arguments.empty()) {
    (void)write_all(kStandardError, program.help());
    return kBadUsage;
  }
  if (const auto error = unknown_command(program, arguments)) return refuse(*error);
  try {
    program.parse(argc, argv);
  } catch (const CLI::CallForHelp&) {
    return write_result(command_in_hand(program).help());
  } catch (const CLI::CallForVersion&) {
    return write_result(version_text() + "\n");
  } catch (const CLI::ParseError& complaint) {
    return refuse(restated(complaint, command_in_hand(program)));
  }
  return chosen();
}

}  // namespace
}  // namespace formsieve::cli

int main(int argc, char** argv) {
  using namespace formsieve;
  cli::guard_standard_streams();
  try {
    return cli::run(argc, argv);
  } catch (const std::bad_alloc&) {
    cli::print_error({ErrorKind::internal, "there is not enough memory for this", "",
                      "ignore columns that are not needed, or give the program more memory"});
  } catch (const std::exception& exception) {
    cli::print_error({ErrorKind::internal, std::string("something unexpected happened: ") + exception.what(), "",
                      "this is a fault of the program; please report it with the command that you typed"});
  } catch (...) {
    cli::print_error({ErrorKind::internal, "something unexpected happened", "",
                      "this is a fault of the program; please report it with the command that you typed"});
  }
  return cli::kUnexpected;
}

#include "usage_error.hpp"

#include "help_page.hpp"

#include <formsieve/run.hpp>

#include <string_view>

namespace formsieve::cli {
namespace {

std::string help_command(const CLI::App& command) {
  return command.get_parent() == nullptr ? "formsieve --help" : "formsieve " + command.get_name() + " --help";
}

Error usage_error(std::string message, std::string hint) {
  return {ErrorKind::usage, std::move(message), "", std::move(hint)};
}

std::vector<std::string> option_names(const CLI::App& command) {
  std::vector<std::string> names;
  for (const CLI::Option* option : command.get_options()) {
    if (!option->get_positional()) names.push_back(option->get_name());
  }
  return names;
}

Error unexpected_argument(const CLI::App& command) {
  const CLI::App& program = command.get_parent() == nullptr ? command : *command.get_parent();
  const std::vector<std::string> misplaced = program.remaining(false);
  if (!misplaced.empty()) {
    return usage_error(misplaced.front() + " stands before the command, where only --help and --version may stand",
                       "put options after the command, as in formsieve survey DATA --json");
  }
  const std::vector<std::string> extras = command.remaining(false);
  const std::string extra = extras.empty() ? "" : extras.front();
  if (extra.starts_with("-") && extra.size() > 1) {
    const std::string name = extra.substr(0, extra.find('='));
    const std::optional<std::string> near = run::nearest(name, option_names(command));
    return usage_error("formsieve " + command.get_name() + " has no option " + name,
                       near ? "did you mean " + *near + "?" : help_command(command) + " lists the options");
  }
  return usage_error("the argument '" + extra + "' is one too many",
                     "write " + usage_line(command) + "; quote names that contain spaces");
}

Error missing_argument(const CLI::App& command) {
  if (command.get_parent() == nullptr) return usage_error("no command is given", help_command(command));
  for (const CLI::Option* option : command.get_options()) {
    if (option->get_required() && option->count() == 0) {
      return usage_error("formsieve " + command.get_name() + " needs " + option->get_name(),
                         "write " + usage_line(command) + "; " + help_command(command) + " shows an example");
    }
  }
  return usage_error("an argument is missing", help_command(command));
}

// "--threads: 'x' is not a whole number …\nfor example --threads 2", as the checks in arguments.cpp word it.
Error refused_value(const std::string& what, const CLI::App& command) {
  constexpr std::string_view kNotConverted = "Could not convert: ";
  if (what.starts_with(kNotConverted)) {
    return usage_error("no such value: " + what.substr(kNotConverted.size()), help_command(command));
  }
  const std::size_t end = what.find('\n');
  if (end == std::string::npos) return usage_error(what, help_command(command));
  return usage_error(what.substr(0, end), what.substr(end + 1));
}

Error missing_value(const std::string& what, const CLI::App& command) {
  for (const CLI::Option* option : command.get_options()) {
    const std::string name = option->get_name();
    if (what.starts_with(name + ":") || what.starts_with(name + " ")) {
      const bool is_flag = option->get_items_expected_max() == 0;
      if (is_flag) return usage_error(name + " takes no value", "write " + name + " alone");
      return usage_error(name + " needs a value", "write " + name + " " + option->get_type_name());
    }
  }
  return usage_error(what, help_command(command));
}

}  // namespace

std::optional<Error> unknown_command(const CLI::App& program, const std::vector<std::string>& arguments) {
  if (arguments.empty() || arguments.front().starts_with("-")) return std::nullopt;
  std::vector<std::string> names;
  for (const CLI::App* command : program.get_subcommands({})) names.push_back(command->get_name());
  for (const std::string& name : names) {
    if (name == arguments.front()) return std::nullopt;
  }
  const std::optional<std::string> near = run::nearest(arguments.front(), names);
  return usage_error("there is no command '" + arguments.front() + "'",
                     near ? "did you mean formsieve " + *near + "?" : "formsieve --help lists the commands");
}

Error restated(const CLI::ParseError& complaint, const CLI::App& command) {
  const std::string what = complaint.what();
  if (dynamic_cast<const CLI::ExtrasError*>(&complaint) != nullptr) return unexpected_argument(command);
  if (dynamic_cast<const CLI::RequiredError*>(&complaint) != nullptr) return missing_argument(command);
  if (dynamic_cast<const CLI::ArgumentMismatch*>(&complaint) != nullptr) return missing_value(what, command);
  return refused_value(what, command);
}

}  // namespace formsieve::cli

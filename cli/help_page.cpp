#include "help_page.hpp"

#include "page.hpp"
#include "terminal.hpp"

#include <formsieve/base.hpp>

#include <algorithm>

namespace formsieve::cli {
namespace {

// Help is laid out for reading, not for the whole width of a large screen.
constexpr std::size_t kWidestHelp = 100;

Page new_page() {
  Terminal terminal = look_at(kStandardOutput);
  terminal.width = std::min(terminal.width, kWidestHelp);
  return Page(terminal);
}

std::string option_label(const CLI::Option& option) {
  if (option.get_positional()) return option.get_name(true);
  std::string label = option.get_name();
  if (option.get_items_expected_max() > 0 && !option.get_type_name().empty()) label += " " + option.get_type_name();
  return label;
}

std::size_t widest_label(const std::vector<const CLI::Option*>& options) {
  std::size_t widest = 0;
  for (const CLI::Option* option : options) widest = std::max(widest, display_width(option_label(*option)));
  return widest;
}

// Positionals first, then options as they were added; --help is what brought the reader here.
std::vector<const CLI::Option*> in_reading_order(const CLI::App& command) {
  std::vector<const CLI::Option*> options;
  for (const CLI::Option* option : command.get_options()) {
    if (option->get_positional()) options.push_back(option);
  }
  for (const CLI::Option* option : command.get_options()) {
    const bool listed = !option->get_positional() && !option->get_group().empty();
    if (listed && option != command.get_help_ptr()) options.push_back(option);
  }
  return options;
}

// In one line where it fits: a help page that scrolls away is read by nobody.
void show_example(Page& page, const std::vector<std::string>& commands) {
  const std::string lead = "For example: ";
  if (commands.size() == 1 && display_width(lead + commands.front()) <= page.width()) {
    page.prose(lead + commands.front());
    return;
  }
  page.prose(lead);
  for (const std::string& line : commands) page.command(line);
}

}  // namespace

std::string HelpPage::make_help(const CLI::App* command, std::string /*name*/, CLI::AppFormatMode /*mode*/) const {
  Page page = new_page();
  page.prose("formsieve " + usage);
  page.prose(command->get_description());
  page.blank();
  std::vector<const CLI::Option*> full;
  std::vector<std::string> brief;
  for (const CLI::Option* option : in_reading_order(*command)) {
    if (!brief_group.empty() && option->get_group() == brief_group) {
      brief.push_back(option->get_name());
    } else {
      full.push_back(option);
    }
  }
  const std::size_t label_width = widest_label(full);
  for (const CLI::Option* option : full) {
    page.labelled(option_label(*option), label_width, option->get_description());
  }
  if (!brief.empty()) page.prose(brief_note + ": " + joined(brief, ", "));
  for (const std::string& note : notes) page.prose(note);
  show_example(page, example);
  return page.text();
}

std::string ProgramHelp::make_help(const CLI::App* program, std::string /*name*/, CLI::AppFormatMode /*mode*/) const {
  Page page = new_page();
  page.prose("formsieve " + std::string(version()) + ": " + program->get_description());
  page.blank();
  std::size_t label_width = 0;
  const std::vector<const CLI::App*> commands = program->get_subcommands({});
  const auto usage_of = [](const CLI::App* command) {
    return std::dynamic_pointer_cast<HelpPage>(command->get_formatter())->usage;
  };
  for (const CLI::App* command : commands) label_width = std::max(label_width, display_width(usage_of(command)));
  for (const CLI::App* command : commands) {
    page.labelled(usage_of(command), label_width, command->get_description());
  }
  page.blank();
  page.prose("Each command explains its options: formsieve search --help. formsieve --version says which one this is.");
  page.prose(
      "Results go to standard output, all else to standard error. Exit codes: 0 done, 1 unexpected failure, 2 bad "
      "usage or plan, 3 bad data, 4 stopped early with a usable run folder.");
  page.blank();
  page.prose("To begin:");
  page.command("formsieve survey coldstores.csv");
  page.command("formsieve search coldstores.csv --response energy_kwh");
  return page.text();
}

std::string usage_line(const CLI::App& command) {
  const auto page = std::dynamic_pointer_cast<HelpPage>(command.get_formatter());
  return page ? "formsieve " + page->usage : "formsieve COMMAND";
}

}  // namespace formsieve::cli

// Help that fits a screen: usage, one sentence, the options from their one table, an example.
#pragma once

#include <CLI/CLI.hpp>

#include <string>
#include <vector>

namespace formsieve::cli {

/// The help of one command, made from its options. Groups named in `brief` are listed by name only, in one line.
class HelpPage : public CLI::FormatterBase {
 public:
  std::string usage;                 ///< "search PLAN | DATA --response COLUMN"
  std::vector<std::string> notes;    ///< sentences after the options
  std::vector<std::string> example;  ///< commands to type
  std::string brief_group;
  std::string brief_note;  ///< where the brief group is explained

  std::string make_help(const CLI::App* command, std::string name, CLI::AppFormatMode mode) const override;
};

/// The help of the program: its commands and exit codes.
class ProgramHelp : public CLI::FormatterBase {
 public:
  std::string make_help(const CLI::App* program, std::string name, CLI::AppFormatMode mode) const override;
};

/// The usage line of a command, "formsieve survey DATA [OPTIONS]".
std::string usage_line(const CLI::App& command);

}  // namespace formsieve::cli

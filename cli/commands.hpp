// The commands: each adds its options to the parser and, when it is the one typed, leaves what is to be run.
#pragma once

#include <CLI/CLI.hpp>

#include <functional>

namespace formsieve::cli {

/// What the parser found to do; returns the exit code.
using Action = std::function<int()>;

void add_survey_command(CLI::App& program, Action& chosen);
void add_draft_command(CLI::App& program, Action& chosen);
void add_search_command(CLI::App& program, Action& chosen);
void add_show_command(CLI::App& program, Action& chosen);
void add_apply_command(CLI::App& program, Action& chosen);
void add_compare_command(CLI::App& program, Action& chosen);
void add_equation_command(CLI::App& program, Action& chosen);

}  // namespace formsieve::cli

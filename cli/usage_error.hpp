// What the parser says about wrong arguments, restated: what is wrong, and what to type.
#pragma once

#include <formsieve/base.hpp>

#include <CLI/CLI.hpp>

#include <optional>
#include <string>
#include <vector>

namespace formsieve::cli {

/// An error (kind usage) when the first argument is neither an option nor a command of the program; names the nearest
/// command where one is near.
std::optional<Error> unknown_command(const CLI::App& program, const std::vector<std::string>& arguments);

/// The parser's complaint as an error of kind usage. `command` is the command that was being parsed, or the program.
Error restated(const CLI::ParseError& complaint, const CLI::App& command);

}  // namespace formsieve::cli

// Failures as the user meets them: an exit code, and lines on standard error that say what happened, where, and what
// to type.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/run.hpp>

#include <cstddef>
#include <string>

namespace formsieve::cli {

inline constexpr int kDone = 0;
inline constexpr int kUnexpected = 1;    ///< a bug, or a result that could not be written
inline constexpr int kBadUsage = 2;      ///< arguments, plan, or a run folder that is none
inline constexpr int kBadData = 3;       ///< the table, also when it cannot be read
inline constexpr int kStoppedEarly = 4;  ///< budget or signal; the run folder is usable

/// The exit code of a failure. Files are judged by what they are to the command: one that cannot be read or written
/// (kind io) is bad data when it is the table (its name is in `error.where`), bad usage when the user named it wrongly
/// (`named_input`: a plan or a run folder), and unexpected otherwise (a folder that cannot be written).
int exit_code_of(const Error& error, const std::string& data_file, bool named_input = false);

/// "error: what (where)", "fix: …" and, when there are any, "settings: …" in force; wrapped on a terminal, one line
/// each otherwise. `settings` may be empty.
std::string error_text(const Error& error, const std::string& settings, bool is_terminal, bool colour,
                       std::size_t width);

/// Writes error_text to standard error.
void print_error(const Error& error, const std::string& settings = {});

/// Prints the error, with the settings that the table was read by when it is about the table, and returns its exit
/// code.
int refused(const Error& error, const run::Plan& plan, bool named_input = false);

/// Writes a finished result to standard output. Returns `code`, or kUnexpected with a message when the device fails. A
/// reader that has gone away has what it wanted: that is no failure.
int write_result(const std::string& text, int code = kDone);

}  // namespace formsieve::cli

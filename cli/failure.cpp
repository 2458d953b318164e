#include "failure.hpp"

#include "arguments.hpp"
#include "output.hpp"
#include "terminal.hpp"
#include "wrapping.hpp"

#include <cerrno>
#include <system_error>

namespace formsieve::cli {
namespace {

std::string part(const std::string& label, Tone tone, const std::string& text, bool is_terminal, bool colour,
                 std::size_t width) {
  const std::string first = paint(label, tone, colour) + " ";
  const std::string hanging(label.size() + 1, ' ');
  if (!is_terminal) return first + printable(text) + "\n";
  return indented(wrapped(text, width - hanging.size()), first, hanging);
}

// True when `where` speaks of the file: "stores.csv", "plans/stores.csv, line 7", not "stores.csv.run".
bool names_file(const std::string& where, const std::string& file) {
  if (file.empty()) return false;
  for (std::size_t at = where.find(file); at != std::string::npos; at = where.find(file, at + 1)) {
    const std::size_t end = at + file.size();
    const bool starts_name = at == 0 || where[at - 1] == '/';
    const bool ends_name = end == where.size() || where[end] == ',' || where[end] == ':';
    if (starts_name && ends_name) return true;
  }
  return false;
}

}  // namespace

int exit_code_of(const Error& error, const std::string& data_file, bool named_input) {
  switch (error.kind) {
    case ErrorKind::usage:
    case ErrorKind::plan:
      return kBadUsage;
    case ErrorKind::data:
      return kBadData;
    case ErrorKind::io:
      if (names_file(error.where, data_file)) return kBadData;
      return named_input ? kBadUsage : kUnexpected;
    case ErrorKind::internal:
      break;
  }
  return kUnexpected;
}

std::string error_text(const Error& error, const std::string& settings, bool is_terminal, bool colour,
                       std::size_t width) {
  const std::string where = error.where.empty() ? "" : " (" + error.where + ")";
  std::string text = part("error:", Tone::alarm, error.message + where, is_terminal, colour, width);
  if (!error.hint.empty()) text += part("fix:", Tone::strong, error.hint, is_terminal, colour, width);
  if (!settings.empty()) text += part("settings:", Tone::quiet, settings, is_terminal, colour, width);
  return text;
}

void print_error(const Error& error, const std::string& settings) {
  const Terminal terminal = look_at(kStandardError);
  const std::string text = error_text(error, settings, terminal.is_terminal, terminal.colour, terminal.width);
  (void)write_all(kStandardError, text);
}

int refused(const Error& error, const run::Plan& plan, bool named_input) {
  const bool about_table = error.kind == ErrorKind::data && names_file(error.where, plan.data.file);
  print_error(error, about_table ? settings_in_force(plan) : std::string());
  return exit_code_of(error, plan.data.file, named_input);
}

int write_result(const std::string& text, int code) {
  const int failure = write_all(kStandardOutput, text);
  if (failure == 0 || failure == EPIPE) return code;
  print_error({ErrorKind::io, "the result could not be written to standard output",
               std::generic_category().message(failure),
               "make room there or send the output elsewhere; what was computed is not lost where a run folder was "
               "written"});
  return kUnexpected;
}

}  // namespace formsieve::cli

#include "table/opening.hpp"

#include "table/encoding.hpp"
#include "table/quoting.hpp"

namespace formsieve::table {

Status check_options(const CsvOptions& options) {
  const auto refuse = [](std::string message, std::string hint) {
    return Error{ErrorKind::usage, std::move(message), {}, std::move(hint)};
  };
  if (options.separator && *options.separator != ',' && *options.separator != ';' && *options.separator != '\t')
    return refuse(show(std::string(1, *options.separator)) + " cannot be the separator",
                  "data.separator is \"comma\", \"semicolon\" or \"tab\"");
  if (options.decimal && *options.decimal != '.' && *options.decimal != ',')
    return refuse(show(std::string(1, *options.decimal)) + " cannot be the decimal mark",
                  "data.decimal is \"point\" or \"comma\"");
  return {};
}

Result<std::size_t> check_content(std::string_view bytes, const std::string& name) {
  if (const auto foreign = recognise_foreign_format(bytes))
    return Error{ErrorKind::data, "this is " + foreign->what + ", not a table in UTF-8 text", name, foreign->hint};
  const std::size_t begin = bytes.starts_with(kUtf8Mark) ? kUtf8Mark.size() : 0;
  if (bytes.find_first_not_of(" \t\r\n", begin) == bytes.npos)
    return Error{ErrorKind::data, "the file is empty", name,
                 "A table has a line with the names of its columns, then its rows"};
  return begin;
}

std::size_t find_table_end(std::string_view bytes, char separator) {
  const std::string_view empty = separator == '\t' ? " \r\n" : " \t\r\n";
  std::size_t end = bytes.size();
  while (end > 0) {
    const std::size_t feed = end < 2 ? bytes.npos : bytes.rfind('\n', end - 2);
    const std::size_t begin = feed == bytes.npos ? 0 : feed + 1;
    if (begin == 0 || bytes.substr(begin, end - begin).find_first_not_of(empty) != bytes.npos) break;
    end = begin;
  }
  return end;
}

}  // namespace formsieve::table

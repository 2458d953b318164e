// What is looked at before the rows of a delimited text are read: options, the kind of file, where the table ends.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::table {

/// Options must name a separator and a decimal mark that are among those read. Errors of kind usage.
Status check_options(const CsvOptions& options);

/// A file, by its first bytes, must hold text. Returns the bytes of the byte order mark, 0 or 3. Errors (kind data):
/// another format, nothing but blanks.
Result<std::size_t> check_content(std::string_view bytes, const std::string& name);

/// Where the table ends: lines without content at the end of the file are not part of it.
std::size_t find_table_end(std::string_view bytes, char separator);

}  // namespace formsieve::table

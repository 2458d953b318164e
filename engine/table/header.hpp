// The first line of a delimited text file: the names of the columns.
#pragma once

#include "table/faults.hpp"

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>

namespace formsieve::table {

/// Reads the header at `source.bytes[begin]` into `source.header`; returns where the rows start. Errors (kind data),
/// each with line and column: faults of bytes and quotes, an empty line, a name that is empty or used twice, and
/// numbers in place of names (a header is then probably missing; names that are numbers must be quoted).
Result<RowStart> read_header(Source& source, std::size_t begin);

/// Checks that every column to be taken as text exists. Error of kind usage.
Status check_text_columns(const Source& source, const CsvOptions& options);

}  // namespace formsieve::table

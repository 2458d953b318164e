// Finding out a file's separator and decimal mark from its first rows, and never guessing where they leave it open.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::table {

/// A dialect, and whether the file's numbers leave its decimal mark open: no decimal mark was given, and every number
/// with a mark reads both as a decimal fraction and as a whole number with a thousands separator ("1,234").
struct FoundDialect {
  Dialect dialect;
  bool decimal_is_open = false;
  bool decimal_is_sure = false;  ///< given, or shown by a number that can be read in no other way
};

/// Settles on the dialect of `text` (after the byte order mark), taking given options as they are.
///
/// Separator: of comma, semicolon and tab, those that split the first line; of these the one for which most of the
/// first rows have as many cells as the header; then the one that makes more cells numbers; then the one that makes
/// more columns. None splits the first line: comma.
///
/// Decimal mark: the one in which numbers are written that can be read in no other way, from the first rows, else from
/// the whole file; where both occur (one of them in codes or dates, say), the one that makes more whole columns
/// numbers. With comma as separator, a decimal comma can only stand in quoted cells.
///
/// Error (kind data): the first lines are split by a character that is none of the three (a bar or blanks). `source`
/// names the file in it.
Result<FoundDialect> find_dialect(std::string_view text, const std::string& source, const CsvOptions& options);

}  // namespace formsieve::table

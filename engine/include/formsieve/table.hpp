// Room table: columns, types, missing values; readers for delimited text and SQLite. Knows nothing of regression.
// May call: base.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::table {

enum class ColumnType { numeric, text };

/// The level code of a missing text cell.
inline constexpr std::uint32_t kMissingLevel = std::numeric_limits<std::uint32_t>::max();

/// One column. Numeric columns fill `numbers` (missing = NaN, every other value finite); text columns fill `codes` and
/// `levels`.
struct Column {
  std::string name;
  ColumnType type = ColumnType::numeric;
  std::vector<double> numbers;       ///< [n_rows], numeric columns only
  std::vector<std::uint32_t> codes;  ///< [n_rows], index into `levels` or kMissingLevel, text columns only
  std::vector<std::string> levels;   ///< distinct texts in order of first appearance, text columns only
  std::size_t n_missing = 0;
};

/// How a delimited text file is written. Unset members are found out from the file.
struct CsvOptions {
  std::optional<char> separator;  ///< ',', ';' or '\t'
  std::optional<char> decimal;    ///< '.' or ','
  std::vector<std::string> missing = {"",     "NA", "N/A",
                                      "null", ".",  "-"};  ///< cells (trimmed, as written) that mean "no value"
  std::vector<std::string> text;  ///< columns to take as text though their cells are numbers (codes, post codes)
  unsigned threads = 0;           ///< 0: all that the process may use
};

/// The dialect that a reader settled on.
struct Dialect {
  char separator = ',';
  char decimal = '.';
  bool byte_order_mark = false;
};

/// A table in memory, by columns.
struct Table {
  std::string source;  ///< the file as named by the caller
  std::string sha256;  ///< of the file's bytes, lower-case hexadecimal
  Dialect dialect;
  std::size_t n_rows = 0;
  std::vector<Column> columns;
  std::vector<std::uint64_t>
      line_of_row;  ///< [n_rows] first line of each row in the file, counted from 1; empty for SQLite

  /// Index of the column with exactly this name.
  std::optional<std::size_t> find(const std::string& name) const;
};

/// Reads a delimited text file by RFC 4180 (quotes with embedded separators and newlines; CR LF or LF; UTF-8 with or
/// without a byte order mark). A column is numeric when every non-missing cell is a finite number. Errors (kind data or
/// io), each naming file, line and column of the earliest fault: unreadable or empty file, a header alone, duplicate or
/// empty header, ragged row, unclosed quote, invalid UTF-8, NUL byte, a stray text cell in an otherwise numeric column.
/// Cost: O(bytes), parsed in parallel over blocks that start at row ends; the result does not depend on the number of
/// threads.
Result<Table> read_csv(const std::string& path, const CsvOptions& options = {});

/// Reads the rows of one SELECT from an SQLite database opened read-only. NULL is missing. Errors name the statement.
Result<Table> read_sqlite(const std::string& path, const std::string& query);

}  // namespace formsieve::table

// Room table: columns, types, missing values; readers for delimited text and SQLite. Knows nothing of regression.
// May call: base.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <cstdint>
#include <functional>
#include <limits>
#include <optional>
#include <span>
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
/// without a byte order mark). Spaces and tabs around cells are no part of them unless quoted; lines without content at
/// the end of the file are no rows.
///
/// A number is decimal digits with at most one decimal mark, an optional sign and exponent, read as the nearest double;
/// words (nan, inf), hexadecimal notation and thousands separators are none. A column is numeric when every non-missing
/// cell is a number, quoted or not. It is text when plainly so; when it holds other cells too, but at least half of its
/// values are figures, or at most three different words stand beside at least ten different numbers, that is an error,
/// not a guess. So are numbers that, for want of better ones in the file, may have a decimal or a thousands mark.
///
/// Errors (kind usage for options, io for files that cannot be read, else data), each naming file, line and column of
/// the earliest fault and a remedy: not found, a folder, no ordinary file, unreadable or empty file, another format
/// than text, a header alone, duplicate or empty header, ragged row, empty line, unclosed or stray quote, lone CR,
/// invalid UTF-8, NUL byte, a stray text cell in an otherwise numeric column. Cost: O(bytes), parsed in parallel over
/// blocks that start at row ends; memory about that of the file and the columns together. The result does not depend on
/// the number of threads.
Result<Table> read_csv(const std::string& path, const CsvOptions& options = {});

/// Fills a part of the span from its start and returns how many bytes; 0 at the end of the text.
using ByteReader = std::function<Result<std::size_t>(std::span<char>)>;

/// A text to be read from its start to its end, once.
struct ByteStream {
  ByteReader read;
  std::uint64_t n_bytes = 0;  ///< 0 when unknown
};

/// Opens a file, a pipe or a device for reading; "-" is standard input. Errors (kind io): not found, a folder, no
/// permission; a read that fails later is an error of the reader.
Result<ByteStream> open_stream(const std::string& path);

/// Reads the rows of one SELECT (or WITH … SELECT, or VALUES) from an SQLite database opened read-only. NULL is
/// missing. A column holds numbers or texts as stored; `sha256` is that of the database file, without what a
/// write-ahead log beside it may hold. Errors name the statement: kind plan for a query that is not one SELECT or that
/// SQLite refuses; io when the file cannot be read; data for no database, no rows, a name twice, numbers and texts in
/// one column, numbers all stored as text, a BLOB, an infinite number, text that is not UTF-8.
Result<Table> read_sqlite(const std::string& path, const std::string& query);

}  // namespace formsieve::table

#include "table/bytes.hpp"
#include "table/encoding.hpp"
#include "table/hash.hpp"
#include "table/levels.hpp"
#include "table/quoting.hpp"
#include "table/sqlite_statement.hpp"

#include <formsieve/table.hpp>

#include <cmath>
#include <exception>
#include <limits>
#include <new>
#include <utility>
#include <vector>

namespace formsieve::table {

namespace {

/// A result column while rows arrive; nothing is known of its type before the last.
struct GrowingColumn {
  std::string name;
  std::vector<double> numbers;       ///< NaN where not a number
  std::vector<std::uint32_t> codes;  ///< from the first text on; kMissingLevel where not a text
  LevelIndex texts;
  std::size_t n_missing = 0;
  std::size_t n_numbers = 0;
  std::size_t n_texts = 0;
};

/// Reads the rows of one SELECT.
class SelectReader {
 public:
  SelectReader(const std::string& path, const std::string& query) : path_(path), query_(query) {}

  Result<Table> run() {
    if (Status status = check_file(path_); !status) return status.error();
    Result<std::string> sha256 = sha256_hex_of_file(path_);
    if (!sha256) return sha256.error();
    Result<SelectStatement> statement = SelectStatement::prepare(path_, query_);
    if (!statement) return statement.error();
    if (Status status = name_columns(*statement); !status) return status.error();
    if (Status status = read_rows(*statement); !status) return status.error();
    if (Status status = check_columns(); !status) return status.error();
    return take_table(std::move(*sha256));
  }

 private:
  Status name_columns(const SelectStatement& statement) {
    columns_.resize(statement.n_columns());
    for (std::size_t i = 0; i < columns_.size(); ++i) {
      columns_[i].name = statement.column_name(i);
      const std::string& name = columns_[i].name;
      if (name.empty())
        return error("column " + std::to_string(i + 1) + " of the result has no name",
                     "Name it in the statement: SELECT … AS name");
      for (std::size_t j = 0; j < i; ++j)
        if (columns_[j].name == name)
          return error("columns " + std::to_string(j + 1) + " and " + std::to_string(i + 1) +
                           " of the result are both named " + show(name),
                       "Give every column a name of its own: SELECT … AS other_name");
    }
    return {};
  }

  Status read_rows(SelectStatement& statement) {
    for (;;) {
      const Result<bool> has_row = statement.step();
      if (!has_row) return has_row.error();
      if (!*has_row) break;
      for (std::size_t i = 0; i < columns_.size(); ++i)
        if (Status status = read_cell(statement.cell(i), columns_[i]); !status) return status;
      ++n_rows_;
      if (n_rows_ == kMissingLevel) return error("the result has too many rows", "Add a LIMIT to the statement");
    }
    if (n_rows_ == 0) return error("the statement returns no rows", "Loosen its WHERE clause, or check the table");
    return {};
  }

  Status read_cell(const SqliteCell& cell, GrowingColumn& column) {
    constexpr double kNone = std::numeric_limits<double>::quiet_NaN();
    column.numbers.push_back(cell.kind == SqliteCell::Kind::number ? cell.number : kNone);
    if (!column.codes.empty()) column.codes.push_back(kMissingLevel);
    switch (cell.kind) {
      case SqliteCell::Kind::null:
        ++column.n_missing;
        return {};
      case SqliteCell::Kind::number:
        ++column.n_numbers;
        if (std::isfinite(cell.number)) return {};
        return cell_error(column, "an infinite number", "Leave such rows out: WHERE abs(" + column.name + ") < 9e999");
      case SqliteCell::Kind::text:
        ++column.n_texts;
        return read_text(cell.text, column);
      case SqliteCell::Kind::blob:
        break;
    }
    return cell_error(column, "binary data (a BLOB), neither number nor text", "Leave the column out of the statement");
  }

  Status read_text(std::string_view text, GrowingColumn& column) {
    for (std::size_t at = 0; at < text.size();) {
      const std::size_t length = text[at] == '\0' ? 0 : utf8_length(text, at);
      if (length == 0)
        return cell_error(column, "a text with a byte that is not valid UTF-8, or NUL",
                          "Correct the text in the table");
      at += length;
    }
    if (column.codes.empty()) column.codes.resize(n_rows_ + 1, kMissingLevel);
    column.codes.back() = column.texts.add(text, false, n_rows_);
    return {};
  }

  /// Every column must be of one kind, and a table without any stored number was probably filled by an import that left
  /// its numbers as text.
  Status check_columns() const {
    std::size_t n_numbers = 0;
    for (const GrowingColumn& column : columns_) {
      n_numbers += column.n_numbers;
      if (column.n_numbers > 0 && column.n_texts > 0) return mixed_error(column);
    }
    if (n_numbers > 0) return {};
    for (const GrowingColumn& column : columns_)
      if (holds_only_numerals(column))
        return error("column " + show(column.name) + " holds numbers stored as text, and no column holds real numbers",
                     "Turn them into numbers in the statement: CAST(" + column.name + " AS REAL) AS " + column.name);
    return {};
  }

  static bool holds_only_numerals(const GrowingColumn& column) {
    for (const LevelIndex::Level& level : column.texts.levels())
      if (!is_numeral(level.text)) return false;
    return column.n_texts > 0;
  }

  Error mixed_error(const GrowingColumn& column) const {
    const LevelIndex::Level& first = column.texts.levels().front();
    std::string literal(first.text);
    for (std::size_t at = literal.find('\''); at != literal.npos; at = literal.find('\'', at + 2))
      literal.insert(at, 1, '\'');
    return {ErrorKind::data,
            "the text " + show(first.text) + " stands among " + std::to_string(column.n_numbers) + " numbers and " +
                count(column.n_texts, "text", "texts") + " in this column",
            place(column, first.first_row),
            "In the statement, take it as missing: NULLIF(" + column.name + ", '" + literal + "') AS " + column.name +
                "; or take the whole column as text: CAST(" + column.name + " AS TEXT) AS " + column.name};
  }

  Table take_table(std::string sha256) {
    Table table;
    table.source = path_;
    table.sha256 = std::move(sha256);
    table.n_rows = n_rows_;
    for (GrowingColumn& growing : columns_) {
      Column column;
      column.name = std::move(growing.name);
      column.n_missing = growing.n_missing;
      column.type = growing.n_texts > 0 ? ColumnType::text : ColumnType::numeric;
      if (growing.n_texts > 0) {
        column.codes = std::move(growing.codes);
        for (const LevelIndex::Level& level : growing.texts.levels()) column.levels.emplace_back(level.text);
      } else {
        column.numbers = std::move(growing.numbers);
      }
      table.columns.push_back(std::move(column));
    }
    return table;
  }

  std::string place(const GrowingColumn& column, std::size_t row) const {
    return path_ + ", row " + std::to_string(row + 1) + " of the query, column " + show(column.name);
  }

  Error cell_error(const GrowingColumn& column, std::string message, std::string hint) const {
    return {ErrorKind::data, std::move(message), place(column, n_rows_), std::move(hint)};
  }

  Error error(std::string message, std::string hint) const {
    return {ErrorKind::data, std::move(message), describe_query(path_, query_), std::move(hint)};
  }

  const std::string& path_;
  const std::string& query_;
  std::vector<GrowingColumn> columns_;
  std::size_t n_rows_ = 0;
};

}  // namespace

Result<Table> read_sqlite(const std::string& path, const std::string& query) {
  try {
    return SelectReader(path, query).run();
  } catch (const std::bad_alloc&) {
    return Error{ErrorKind::io, "there is not enough memory to read the rows", describe_query(path, query),
                 "Select fewer rows or columns"};
  } catch (const std::exception& exception) {
    return Error{
        ErrorKind::internal, std::string("reading failed: ") + exception.what(), describe_query(path, query), {}};
  }
}

}  // namespace formsieve::table

// One SELECT on an SQLite database that is opened read-only.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <memory>
#include <string>
#include <string_view>

struct sqlite3;
struct sqlite3_stmt;

namespace formsieve::table {

/// A value as SQLite stores it.
struct SqliteCell {
  enum class Kind { null, number, text, blob };
  Kind kind = Kind::null;
  double number = 0.0;    ///< integers beyond 2^53 are rounded to the nearest double
  std::string_view text;  ///< valid until the next step
};

/// "plant.db, query 'select …'", the place of errors that concern a statement.
std::string describe_query(const std::string& path, const std::string& query);

/// True for text that is a number by the rules of the CSV reader (decimal point).
bool is_numeral(std::string_view text);

/// A prepared statement and its database.
class SelectStatement {
 public:
  /// Opens the database read-only and prepares the statement. Errors: kind data for a file that is no SQLite database;
  /// io when it cannot be opened; plan for anything but exactly one SELECT (or WITH … SELECT, or VALUES), and for
  /// statements that SQLite does not accept, with its words.
  static Result<SelectStatement> prepare(const std::string& path, const std::string& query);

  std::size_t n_columns() const;
  std::string column_name(std::size_t column) const;

  /// Moves to the next row; false after the last. Error (kind data) when the statement fails on the way.
  Result<bool> step();
  SqliteCell cell(std::size_t column) const;

 private:
  struct CloseDatabase {
    void operator()(sqlite3* database) const noexcept;
  };
  struct FinishStatement {
    void operator()(sqlite3_stmt* statement) const noexcept;
  };

  SelectStatement(std::string path, std::string query) : path_(std::move(path)), query_(std::move(query)) {}
  Status open();
  Status compile();
  Status check_single_select(const char* rest) const;
  Error sqlite_error(ErrorKind kind, int code, const std::string& what) const;

  std::string path_;
  std::string query_;
  std::unique_ptr<sqlite3, CloseDatabase> database_;
  std::unique_ptr<sqlite3_stmt, FinishStatement> statement_;  // finished before its database closes
};

}  // namespace formsieve::table

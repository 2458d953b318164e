#include "table/sqlite_statement.hpp"

#include "table/cells.hpp"
#include "table/number.hpp"
#include "table/quoting.hpp"

#include <sqlite3.h>

#include <algorithm>
#include <array>
#include <limits>

namespace formsieve::table {

namespace {

/// How long a statement waits for a program that is writing to the database.
constexpr int kBusyMilliseconds = 5000;

constexpr const char* kOneSelect =
    "Give one statement that begins with SELECT, WITH or VALUES: data.query = \"SELECT … FROM …\"";

/// Skips blanks, semicolons and comments (-- to the end of the line, and /* … */) at the start of SQL text.
std::string_view skip_filler(std::string_view sql) {
  for (;;) {
    const std::size_t start = sql.find_first_not_of(" \t\r\n\f;");
    sql = start == sql.npos ? std::string_view{} : sql.substr(start);
    std::size_t end = 0;
    if (sql.starts_with("--")) {
      end = sql.find('\n');
    } else if (sql.starts_with("/*")) {
      end = sql.find("*/", 2);
      if (end != sql.npos) end += 2;
    } else {
      return sql;
    }
    sql = end == sql.npos ? std::string_view{} : sql.substr(end);
  }
}

std::string first_word(std::string_view sql) {
  std::string word;
  for (const char c : sql) {
    const bool is_lower = c >= 'a' && c <= 'z';
    if (!is_lower && !(c >= 'A' && c <= 'Z')) break;
    word += is_lower ? static_cast<char>(c - 'a' + 'A') : c;
  }
  return word;
}

}  // namespace

std::string describe_query(const std::string& path, const std::string& query) {
  return path + ", query " + show(query);
}

bool is_numeral(std::string_view text) { return parse_number(Syntax(',', '.').trim(text), '.').has_value(); }

void SelectStatement::CloseDatabase::operator()(sqlite3* database) const noexcept { sqlite3_close(database); }

void SelectStatement::FinishStatement::operator()(sqlite3_stmt* statement) const noexcept {
  sqlite3_finalize(statement);
}

Result<SelectStatement> SelectStatement::prepare(const std::string& path, const std::string& query) {
  SelectStatement select(path, query);
  if (Status status = select.open(); !status) return status.error();
  if (Status status = select.compile(); !status) return status.error();
  return select;
}

Status SelectStatement::open() {
  sqlite3* database = nullptr;
  const int code = sqlite3_open_v2(path_.c_str(), &database, SQLITE_OPEN_READONLY, nullptr);
  database_.reset(database);
  if (code != SQLITE_OK) return sqlite_error(ErrorKind::io, code, "the database cannot be opened");
  sqlite3_busy_timeout(database, kBusyMilliseconds);
  // A database from elsewhere may define views and triggers; none of its own SQL may call functions with side effects.
  sqlite3_db_config(database, SQLITE_DBCONFIG_DEFENSIVE, 1, nullptr);
  sqlite3_db_config(database, SQLITE_DBCONFIG_TRUSTED_SCHEMA, 0, nullptr);
  return {};
}

Status SelectStatement::compile() {
  const std::string word = first_word(skip_filler(query_));
  if (word != "SELECT" && word != "WITH" && word != "VALUES")
    return Error{ErrorKind::plan, word.empty() ? "the query is empty or no SQL" : "the query is not a SELECT",
                 describe_query(path_, query_), kOneSelect};
  if (query_.size() > static_cast<std::size_t>(std::numeric_limits<int>::max()))
    return Error{ErrorKind::plan, "the query is too long", path_, kOneSelect};
  sqlite3_stmt* statement = nullptr;
  const char* rest = nullptr;
  const int code =
      sqlite3_prepare_v2(database_.get(), query_.data(), static_cast<int>(query_.size()), &statement, &rest);
  statement_.reset(statement);
  if (code == SQLITE_NOTADB || code == SQLITE_CORRUPT)
    return Error{ErrorKind::data, "the file is not an SQLite database, or it is damaged", path_,
                 "A query reads SQLite databases; for a table in plain text leave data.query out"};
  if (code != SQLITE_OK) return sqlite_error(ErrorKind::plan, code, "the query cannot be run");
  return check_single_select(rest);
}

Status SelectStatement::check_single_select(const char* rest) const {
  const auto refuse = [this](std::string message) {
    return Error{ErrorKind::plan, std::move(message), describe_query(path_, query_), kOneSelect};
  };
  const auto tail = static_cast<std::size_t>(rest - query_.data());
  if (!skip_filler(std::string_view(query_).substr(tail)).empty())
    return refuse("the query holds more than one statement");
  if (sqlite3_stmt_readonly(statement_.get()) == 0) return refuse("the query would change the database");
  if (sqlite3_column_count(statement_.get()) == 0) return refuse("the query returns no columns");
  if (sqlite3_bind_parameter_count(statement_.get()) > 0)
    return refuse("the query has parameters (?, :name) that nothing fills");
  return {};
}

std::size_t SelectStatement::n_columns() const {
  return static_cast<std::size_t>(sqlite3_column_count(statement_.get()));
}

std::string SelectStatement::column_name(std::size_t column) const {
  const char* name = sqlite3_column_name(statement_.get(), static_cast<int>(column));
  return name != nullptr ? name : "";
}

Result<bool> SelectStatement::step() {
  const int code = sqlite3_step(statement_.get());
  if (code == SQLITE_ROW) return true;
  if (code == SQLITE_DONE) return false;
  if (code == SQLITE_NOMEM) throw std::bad_alloc();
  return sqlite_error(ErrorKind::data, code, "the query failed");
}

SqliteCell SelectStatement::cell(std::size_t column) const {
  sqlite3_stmt* const row = statement_.get();
  const int index = static_cast<int>(column);
  switch (sqlite3_column_type(row, index)) {
    case SQLITE_INTEGER:
    case SQLITE_FLOAT:
      return {SqliteCell::Kind::number, sqlite3_column_double(row, index), {}};
    case SQLITE_TEXT: {
      const void* text = sqlite3_column_text(row, index);
      if (text == nullptr) throw std::bad_alloc();
      return {SqliteCell::Kind::text,
              0.0,
              {static_cast<const char*>(text), static_cast<std::size_t>(sqlite3_column_bytes(row, index))}};
    }
    case SQLITE_BLOB:
      return {SqliteCell::Kind::blob, 0.0, {}};
    default:
      return {};
  }
}

Error SelectStatement::sqlite_error(ErrorKind kind, int code, const std::string& what) const {
  std::string message = what + ": " + (database_ ? sqlite3_errmsg(database_.get()) : sqlite3_errstr(code));
  std::string hint = "Check the statement and the names of tables and columns in it";
  if (code == SQLITE_BUSY || code == SQLITE_LOCKED)
    hint = "Another program is writing to it; try again when it is done";
  if (kind == ErrorKind::io || (code & 0xFF) == SQLITE_CANTOPEN || (code & 0xFF) == SQLITE_READONLY)
    hint =
        "Check that the file and its folder may be read; close other programs that use it, or copy it with its -wal "
        "and -shm files";
  return {kind, std::move(message), describe_query(path_, query_), std::move(hint)};
}

}  // namespace formsieve::table

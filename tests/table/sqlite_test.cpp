#include "tables.hpp"
#include "temporary_file.hpp"

#include "table/hash.hpp"

#include <sqlite3.h>

#include <cmath>
#include <fstream>
#include <sstream>

namespace formsieve::table::test {

namespace {

/// A database made by SQL statements.
class Database {
 public:
  explicit Database(const std::string& sql) {
    sqlite3* database = nullptr;
    REQUIRE(sqlite3_open(file_.path().c_str(), &database) == SQLITE_OK);
    const int code = sqlite3_exec(database, sql.c_str(), nullptr, nullptr, nullptr);
    CHECK(std::string(sqlite3_errmsg(database)) == "not an error");
    sqlite3_close(database);
    REQUIRE(code == SQLITE_OK);
  }
  const std::string& path() const { return file_.path(); }

  Table read(const std::string& query) const {
    Result<Table> table = read_sqlite(path(), query);
    if (!table) FAIL(table.error().message);
    return std::move(*table);
  }
  Error refuse(const std::string& query) const {
    const Result<Table> table = read_sqlite(path(), query);
    REQUIRE_FALSE(table.ok());
    return table.error();
  }

 private:
  TemporaryFile file_;
};

const char* const kStores =
    "CREATE TABLE stores (name TEXT, area REAL, doors INTEGER, note TEXT);"
    "INSERT INTO stores VALUES ('north', 12.5, 2, NULL), ('south', 1e300, NULL, '007'), ('north', -3, 4, 'é');";

std::string bytes_of(const std::string& path) {
  std::ostringstream bytes;
  bytes << std::ifstream(path, std::ios::binary).rdbuf();
  return bytes.str();
}

TEST_CASE("table: the rows of a SELECT become typed columns", "[table][unit]") {
  const Database database(kStores);
  const Table table = database.read("SELECT name, area, doors AS n_doors, note FROM stores");
  REQUIRE(table.n_rows == 3);
  CHECK(table.columns[0].levels == std::vector<std::string>{"north", "south"});
  CHECK(table.columns[0].codes == std::vector<std::uint32_t>{0, 1, 0});
  CHECK(table.columns[1].numbers == std::vector<double>{12.5, 1e300, -3});
  CHECK(table.columns[2].name == "n_doors");
  CHECK(table.columns[2].n_missing == 1);
  CHECK(std::isnan(table.columns[2].numbers[1]));
  CHECK(texts(table.columns[3]) == std::vector<std::string>{"<missing>", "007", "é"});
  CHECK(table.line_of_row.empty());
  CHECK(table.source == database.path());
  CHECK(table.sha256 == sha256_hex(bytes_of(database.path())));
}

TEST_CASE("table: WITH, VALUES, comments and a final semicolon are let pass in a query", "[table][unit]") {
  const Database database(kStores);
  CHECK(database.read("-- all of it\n/* and more */ with s as (select area from stores) select * from s; -- end")
            .n_rows == 3);
  CHECK(database.read("VALUES (1, 2), (3, 4)").columns.size() == 2);
}

TEST_CASE("table: a column of NULLs is numeric and all missing", "[table][unit]") {
  const Database database(kStores);
  const Table table = database.read("SELECT area, NULL AS lacking FROM stores");
  CHECK(table.columns[1].type == ColumnType::numeric);
  CHECK(table.columns[1].n_missing == 3);
}

TEST_CASE("table: anything but one SELECT is refused and leaves the database as it was", "[table][unit]") {
  const Database database(kStores);
  const std::string before = bytes_of(database.path());
  const std::pair<const char*, const char*> cases[] = {
      {"DELETE FROM stores", "not a SELECT"},
      {"PRAGMA user_version = 5", "not a SELECT"},
      {"ATTACH 'other.db' AS other", "not a SELECT"},
      {"SELECT area FROM stores; DELETE FROM stores", "more than one statement"},
      {"WITH s AS (SELECT 1) DELETE FROM stores", "would change the database"},
      {"SELECT area FROM stores WHERE doors > ?", "has parameters"},
      {"SELECT area FROM nowhere", "no such table: nowhere"},
      {"SELECT area FROM stores WHERE", "incomplete input"},
      {"SELECT height FROM stores", "no such column: height"},
      {"", "empty"},
      {"-- nothing", "empty"}};
  for (const auto& [query, message] : cases) {
    CAPTURE(query);
    const Error error = database.refuse(query);
    CHECK(error.kind == ErrorKind::plan);
    CHECK_THAT(error.message, Catch::Contains(message));
    CHECK_THAT(error.where, Catch::Contains(database.path()) && Catch::Contains("query '"));
    CHECK_FALSE(error.hint.empty());
  }
  CHECK(bytes_of(database.path()) == before);
}

TEST_CASE("table: a text among numbers is an error with both remedies typed out", "[table][unit]") {
  const Database database("CREATE TABLE t (x REAL, y); INSERT INTO t VALUES (1, 2), ('it''s', 3), (4, 5), ('', 6);");
  const Error error = database.refuse("SELECT x, y FROM t");
  CHECK(error.kind == ErrorKind::data);
  CHECK(error.where == database.path() + ", row 2 of the query, column 'x'");
  CHECK(error.message == "the text 'it's' stands among 2 numbers and 2 texts in this column");
  CHECK_THAT(error.hint, Catch::Contains("NULLIF(x, 'it''s') AS x") && Catch::Contains("CAST(x AS TEXT) AS x"));
  const Table mended = database.read("SELECT NULLIF(NULLIF(x, 'it''s'), '') AS x, y FROM t");
  CHECK(mended.columns[0].n_missing == 2);
  CHECK(mended.columns[0].numbers[2] == 4);
  CHECK(database.read("SELECT CAST(x AS TEXT) AS x, y FROM t").columns[0].type == ColumnType::text);
}

TEST_CASE("table: a database whose numbers are all stored as text is an error", "[table][unit]") {
  const Database database("CREATE TABLE t (name, x TEXT); INSERT INTO t VALUES ('a', '1.5'), ('b', '2'), ('c', NULL);");
  const Error error = database.refuse("SELECT * FROM t");
  CHECK_THAT(error.message, Catch::Contains("column 'x' holds numbers stored as text"));
  CHECK_THAT(error.hint, Catch::Contains("CAST(x AS REAL) AS x"));
  CHECK(database.read("SELECT name, CAST(x AS REAL) AS x FROM t").columns[1].numbers[0] == 1.5);
  // Beside real numbers, digits stored as text are codes.
  CHECK(database.read("SELECT x AS code, 1 AS one FROM t").columns[0].type == ColumnType::text);
}

TEST_CASE("table: values that no table can hold are refused with their row", "[table][unit]") {
  const Database database("CREATE TABLE t (x); INSERT INTO t VALUES (1), (x'00ff'), (9e999), (CAST(x'41ff' AS TEXT));");
  CHECK(database.refuse("SELECT x FROM t").where == database.path() + ", row 2 of the query, column 'x'");
  CHECK_THAT(database.refuse("SELECT x FROM t").message, Catch::Contains("BLOB"));
  CHECK_THAT(database.refuse("SELECT x FROM t WHERE rowid IN (1, 3)").message, Catch::Contains("infinite"));
  CHECK_THAT(database.refuse("SELECT x FROM t WHERE rowid = 4").message, Catch::Contains("not valid UTF-8"));
}

TEST_CASE("table: names of result columns must be given and differ", "[table][unit]") {
  const Database database(kStores);
  CHECK_THAT(database.refuse("SELECT area, doors AS area FROM stores").message,
             Catch::Contains("columns 1 and 2 of the result are both named 'area'"));
  CHECK_THAT(database.refuse("SELECT area, doors AS '' FROM stores").message,
             Catch::Contains("column 2 of the result has no name"));
}

TEST_CASE("table: a query without rows is an error", "[table][unit]") {
  const Error error = Database(kStores).refuse("SELECT area FROM stores WHERE doors > 99");
  CHECK(error.kind == ErrorKind::data);
  CHECK_THAT(error.message, Catch::Contains("no rows"));
}

TEST_CASE("table: a query that fails half way is an error", "[table][unit]") {
  const Database database(kStores);
  CHECK_THAT(
      database.refuse("SELECT abs(CASE WHEN doors IS NULL THEN -9223372036854775808 ELSE doors END) AS x FROM stores")
          .message,
      Catch::Contains("integer overflow"));
}

TEST_CASE("table: a file that is no database is an error", "[table][unit]") {
  const TemporaryFile text(
      "a,b\n1,2\nand enough text to be longer than a header of a database has to be, to be sure\n");
  const Result<Table> table = read_sqlite(text.path(), "SELECT 1 AS x FROM sqlite_master");
  REQUIRE_FALSE(table.ok());
  CHECK(table.error().kind == ErrorKind::data);
  CHECK_THAT(table.error().message, Catch::Contains("not an SQLite database"));
  const Result<Table> none = read_sqlite(text.path() + ".none", "SELECT 1");
  REQUIRE_FALSE(none.ok());
  CHECK(none.error().kind == ErrorKind::io);
  CHECK_THAT(none.error().message, Catch::Contains("there is no file"));
}

}  // namespace

}  // namespace formsieve::table::test

#include "random_text.hpp"
#include "tables.hpp"

#include "table/census.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::table::test {

namespace {

constexpr std::size_t kBlockSizes[] = {1, 2, 3, 7, 16, 61, 1000, kBlockBytes};
constexpr unsigned kThreads[] = {1, 2, 4};

std::string read_with(std::string_view text, std::size_t block_bytes, unsigned threads) {
  CsvOptions options;
  options.threads = threads;
  return describe(parse_csv(text, "test.csv", options, block_bytes));
}

void check_column(const Column& column, const RandomColumn& expected) {
  CHECK(column.name == expected.name);
  const auto n_missing = std::count(expected.is_missing.begin(), expected.is_missing.end(), true);
  CHECK(column.n_missing == static_cast<std::size_t>(n_missing));
  const bool is_all_missing = static_cast<std::size_t>(n_missing) == expected.is_missing.size();
  REQUIRE((column.type == ColumnType::text) == (expected.is_text && !is_all_missing));
  for (std::size_t row = 0; row < expected.is_missing.size(); ++row) {
    if (column.type == ColumnType::text) {
      REQUIRE((column.codes[row] == kMissingLevel) == expected.is_missing[row]);
      if (!expected.is_missing[row]) REQUIRE(column.levels[column.codes[row]] == expected.texts[row]);
    } else {
      REQUIRE(std::isnan(column.numbers[row]) == expected.is_missing[row]);
      if (!expected.is_missing[row]) REQUIRE(column.numbers[row] == expected.numbers[row]);
    }
  }
}

TEST_CASE("table: random tables are read back as they were written", "[table][property]") {
  std::mt19937_64 random(11);
  for (int i = 0; i < 400; ++i) {
    const RandomText expected = random_text(random, 1 + random() % 30);
    CAPTURE(i, expected.text);
    CsvOptions options;
    options.separator = expected.separator;
    options.decimal = expected.decimal;
    const Table table = read_valid(expected.text, options);
    REQUIRE(table.n_rows == expected.line_of_row.size());
    REQUIRE(table.line_of_row == expected.line_of_row);
    REQUIRE(table.columns.size() == expected.columns.size());
    for (std::size_t c = 0; c < table.columns.size(); ++c) check_column(table.columns[c], expected.columns[c]);
  }
}

TEST_CASE("table: the dialect of random tables is found out", "[table][property]") {
  std::mt19937_64 random(12);
  for (int i = 0; i < 200; ++i) {
    const RandomText expected = random_text(random, 20 + random() % 30);
    const bool has_numbers = std::any_of(expected.columns.begin(), expected.columns.end(),
                                         [](const RandomColumn& column) { return !column.is_text; });
    if (!has_numbers) continue;
    CAPTURE(i, expected.text);
    const Table table = read_valid(expected.text);
    CHECK(table.dialect.separator == expected.separator);
    CHECK(table.dialect.decimal == expected.decimal);
  }
}

TEST_CASE("table: a table does not depend on blocks and threads", "[table][property][parallel]") {
  std::mt19937_64 random(13);
  for (int i = 0; i < 60; ++i) {
    const RandomText table = random_text(random, 1 + random() % 40);
    CAPTURE(i, table.text);
    const std::string expected = read_with(table.text, kBlockBytes, 1);
    for (const std::size_t block_bytes : kBlockSizes)
      for (const unsigned threads : kThreads) REQUIRE(read_with(table.text, block_bytes, threads) == expected);
  }
}

TEST_CASE("table: damaged tables give the same table or error for all blocks and threads", "[table][property]") {
  std::mt19937_64 random(14);
  std::size_t n_errors = 0;
  const int n_texts = 3000;
  for (int i = 0; i < n_texts; ++i) {
    const std::string text = damaged(random_text(random, 1 + random() % 12).text, random);
    CAPTURE(i, text);
    const std::string expected = read_with(text, kBlockBytes, 1);
    n_errors += expected.starts_with("error") ? 1 : 0;
    REQUIRE_FALSE(expected.starts_with("error 4"));  // ErrorKind::internal
    for (const std::size_t block_bytes : {1, 5, 16, 61}) REQUIRE(read_with(text, block_bytes, 1) == expected);
    if (i % 10 == 0) REQUIRE(read_with(text, 7, 4) == expected);
  }
  CHECK(n_errors > n_texts / 2);  // the damage is real
  CHECK(n_errors < n_texts);
}

TEST_CASE("table: every error says where and what, and data errors how to mend it", "[table][property]") {
  std::mt19937_64 random(15);
  for (int i = 0; i < 1000; ++i) {
    const std::string text = damaged(random_text(random, 1 + random() % 12).text, random);
    const Result<Table> table = parse_csv(text, "test.csv", {});
    if (table) continue;
    CAPTURE(i, text, table.error().message);
    CHECK_FALSE(table.error().message.empty());
    CHECK_FALSE(table.error().message.ends_with("."));
    CHECK(table.error().where.starts_with("test.csv"));
    CHECK_FALSE(table.error().hint.empty());
  }
}

TEST_CASE("table: the earliest bad line is reported from every block and thread", "[table][unit]") {
  std::string text = "a,b\n";
  for (int i = 0; i < 5000; ++i) text += i == 1234 || i == 1300 || i == 4000 ? "1,2,3\n" : "1,2\n";
  for (const std::size_t block_bytes : {std::size_t{16}, std::size_t{997}, kBlockBytes}) {
    for (const unsigned threads : kThreads) {
      CsvOptions options;
      options.threads = threads;
      const Result<Table> table = parse_csv(text, "test.csv", options, block_bytes);
      REQUIRE_FALSE(table.ok());
      CHECK(table.error().where == "test.csv, line 1236, column 3");
    }
  }
}

/// The census of a block by its definition, byte by byte.
Census plain_census(std::string_view block) {
  Census census;
  bool inside = false;
  for (const char c : block) {
    if (c == '"') inside = !inside;
    if (c == '\n') {
      ++census.line_feeds;
      ++census.row_ends[inside ? 1 : 0];
    }
  }
  census.odd_quotes = inside;
  return census;
}

TEST_CASE("table: a census counts what a plain loop counts", "[table][property]") {
  std::mt19937_64 random(16);
  const std::string alphabet = "\"\nabcdefghijklmnop,;1234567890";
  for (int i = 0; i < 300; ++i) {
    std::string text;
    const std::size_t n_letters = i % 3 == 0 ? 2 : i % 3 == 1 ? 6 : alphabet.size();
    for (std::size_t n = random() % 20000; n > 0; --n) text += alphabet[random() % n_letters];
    const std::size_t begin = text.empty() ? 0 : random() % text.size();
    const Census census = take_census(text, 0, begin, text.size());
    const Census expected = plain_census(std::string_view(text).substr(begin));
    CHECK(census.line_feeds == expected.line_feeds);
    CHECK(census.row_ends == expected.row_ends);
    CHECK(census.odd_quotes == expected.odd_quotes);
    CHECK_FALSE(census.fault.has_value());
  }
}

TEST_CASE("table: a quoted cell longer than many blocks is read as one cell", "[table][unit]") {
  std::string cell;
  for (int i = 0; i < 500; ++i) cell += "line of a long note, " + std::to_string(i) + "\n";
  const std::string text = "note,x\nshort,1\n\"" + cell + "\",2\nlast,3\nfourth,4\n";
  for (const std::size_t block_bytes : {std::size_t{1}, std::size_t{64}, kBlockBytes}) {
    const Result<Table> table = parse_csv(text, "test.csv", {}, block_bytes);
    REQUIRE(table.ok());
    CHECK(table->columns[0].levels[1] == cell);
    CHECK(table->line_of_row == std::vector<std::uint64_t>{2, 3, 504, 505});
  }
}

TEST_CASE("table: long rows and many quotes cost no more than their length", "[table][unit]") {
  std::string text = "a,b\n";
  for (int i = 0; i < 20; ++i) text += "x,y\n";
  text += "\"";
  for (int i = 0; i < 400000; ++i) text += "\"\"";
  text += "\",y\n";
  // Quadratic work would take minutes here.
  CHECK(read_valid(text).columns[0].levels[1].size() == 400000);
  std::string wide = "c0";
  for (int i = 1; i < 20000; ++i) wide += ",c" + std::to_string(i);
  wide += "\n\"1\"";
  for (int i = 1; i < 20000; ++i) wide += ",\"1\"";
  CHECK(read_valid(wide).columns.size() == 20000);
}

}  // namespace

}  // namespace formsieve::table::test

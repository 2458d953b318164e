#include "tables.hpp"

#include "table/typing.hpp"

namespace formsieve::table::test {

namespace {

/// One column 'x' with these cells, one a line.
std::string column(const std::vector<std::string>& cells) {
  std::string text = "x,row\n";
  for (std::size_t i = 0; i < cells.size(); ++i) text += cells[i] + "," + std::to_string(i) + "\n";
  return text;
}

std::vector<std::string> repeated(std::string cell, std::size_t n) {
  return std::vector<std::string>(n, std::move(cell));
}

std::vector<std::string> numbers(std::size_t n) {
  std::vector<std::string> cells;
  for (std::size_t i = 0; i < n; ++i) cells.push_back(std::to_string(i) + ".5");
  return cells;
}

std::vector<std::string> joined(std::vector<std::string> a, const std::vector<std::string>& b) {
  a.insert(a.end(), b.begin(), b.end());
  return a;
}

TEST_CASE("table: a column is numeric when every value is a number", "[table][unit]") {
  CHECK(read_valid(column({"1", "", "2.5", "NA", "-3e2"})).columns[0].type == ColumnType::numeric);
}

TEST_CASE("table: a column is text when numbers are the lesser part", "[table][unit]") {
  CHECK(read_valid(column({"a", "1", "b"})).columns[0].type == ColumnType::text);
  CHECK(read_valid(column({"12", "12A", "B3", "", "B4"})).columns[0].type == ColumnType::text);
  CHECK(read_valid(column({"a", "b", "NA"})).columns[0].type == ColumnType::text);
}

TEST_CASE("table: a stray text in a numeric column is an error with both remedies typed out", "[table][unit]") {
  std::vector<std::string> cells = numbers(20);
  cells[7] = "abc";
  const Error error = read_invalid(column(cells));
  CHECK(error.kind == ErrorKind::data);
  CHECK(error.where == "test.csv, line 9, column 'x'");
  CHECK(error.message == "'abc' is not a number; 19 of the 20 values in this column are numbers");
  CHECK_THAT(error.hint, Catch::Contains("data.missing = [\"\", \"NA\", \"N/A\", \"null\", \".\", \"-\", \"abc\"]"));
  CHECK_THAT(error.hint, Catch::Contains("data.text = [\"x\"]"));
}

TEST_CASE("table: the proposed settings do what they say", "[table][unit]") {
  std::vector<std::string> cells = numbers(20);
  cells[7] = "abc";
  cells[9] = "\"say \"\"no\"\"\"";
  CHECK_THAT(read_invalid(column(cells)).hint, Catch::Contains("\"abc\", \"say \\\"no\\\"\"]"));
  CsvOptions options;
  options.missing.insert(options.missing.end(), {"abc", "say \"no\""});
  const Table with_markers = read_valid(column(cells), options);
  CHECK(with_markers.columns[0].type == ColumnType::numeric);
  CHECK(with_markers.columns[0].n_missing == 2);
  options = {};
  options.text = {"x"};
  CHECK(read_valid(column(cells), options).columns[0].type == ColumnType::text);
}

TEST_CASE("table: half numbers are in doubt and less than half are text", "[table][unit]") {
  CHECK_THAT(read_invalid(column({"1", "a", "2", "b"})).message,
             Catch::Contains("'a' is not a number; 2 of the 4 values in this column are numbers"));
  CHECK(read_valid(column({"1", "a", "2", "b", "c"})).columns[0].type == ColumnType::text);
}

TEST_CASE("table: few words among many numbers are in doubt however often they occur", "[table][unit]") {
  const std::size_t many = 100;
  CHECK_THAT(read_invalid(column(joined(numbers(kManyNumbers), repeated("below limit", many)))).message,
             Catch::Contains("'below limit' is not a number; 10 of the 110 values"));
  CHECK(read_valid(column(joined(numbers(kManyNumbers - 1), repeated("below limit", many)))).columns[0].type ==
        ColumnType::text);
  std::vector<std::string> words;
  for (std::size_t i = 0; i < many; ++i) words.push_back("word " + std::to_string(i % (kFewWords + 1)));
  CHECK(read_valid(column(joined(numbers(kManyNumbers), words))).columns[0].type == ColumnType::text);
  // The same when the first rows show numbers only, and the words come later.
  CHECK_THAT(read_invalid(column(joined(numbers(1500), repeated("below limit", 4000)))).where,
             Catch::Contains("line 1502, column 'x'"));
}

TEST_CASE("table: figures in notations that are not guessed at never pass for text", "[table][unit]") {
  const std::vector<std::pair<std::vector<std::string>, const char*>> cases = {
      {{"\"1,234.5\"", "\"2,500.5\""}, "is written with thousands separators"},
      {{"12 %", "7 %"}, "has a percent sign"},
      {{"€ 5", "€ 7"}, "has a currency sign"},
      {{"−5", "−7"}, "has a typographic minus sign"},
      {{"5\u00A0", "\u202F7"}, "special space"},
      {{"NaN", "nan"}, "is not a finite number"},
      {{"inf", "3"}, "is not a finite number"},
      {{"1e999", "3"}, "is beyond the largest number"}};
  for (const auto& [cells, message] : cases) {
    CAPTURE(message);
    const Error error = read_invalid(column(cells));
    CHECK_THAT(error.message, Catch::Contains(message));
    CHECK(error.where == "test.csv, line 2, column 'x'");
    CHECK_THAT(error.hint, Catch::Contains("data.text = [\"x\"]"));
  }
}

TEST_CASE("table: words for no number and hexadecimal codes are texts in a text column", "[table][unit]") {
  CHECK(read_valid(column({"0x1A", "0xFF", "a", "nan"})).columns[0].type == ColumnType::text);
}

TEST_CASE("table: of several columns in doubt the one with the earliest line is reported", "[table][unit]") {
  CHECK(read_invalid("a,b\n1,2\n3,x\ny,4\n5,6\n").where == "test.csv, line 3, column 'b'");
  CHECK(read_invalid("a,b\n1,2\ny,x\n3,4\n5,6\n").where == "test.csv, line 3, column 'a'");
}

TEST_CASE("table: faults of all kinds are reported in the order of their lines", "[table][unit]") {
  CHECK(read_invalid("a,b\n1,2\n3,x\n4\n5,6\n").where == "test.csv, line 3, column 'b'");
  CHECK(read_invalid("a,b\n1,2\n4\n3,x\n5,6\n").where == "test.csv, line 3, column 'b'");
  CHECK_THAT(read_invalid("a,b\n1,2\n4\n3,\xFF\n5,6\n").message, Catch::Contains("the row has 1 cell"));
  CHECK_THAT(read_invalid("a,b\n1,2\n3,\xFF\n4\n5,6\n").message, Catch::Contains("not valid UTF-8"));
  CHECK_THAT(read_invalid("a,b\n1,2\n3,\"x\n4\n5,\xFF\n").message, Catch::Contains("never closed"));
  // Within a row, what spoils its bytes comes before the width that it may have caused.
  CHECK_THAT(read_invalid("a,b\n1,2\n4,\xFF,3\n5,6\n").message, Catch::Contains("not valid UTF-8"));
  CHECK_THAT(read_invalid("a,b\n1,2\n4,5\"x,3\n5,6\n").message, Catch::Contains("double quote inside"));
}

}  // namespace

}  // namespace formsieve::table::test

#include "tables.hpp"

namespace formsieve::table::test {

namespace {

struct DialectCase {
  const char* text;
  char separator;
  char decimal;
};

TEST_CASE("table: dialect is found out from the file", "[table][unit]") {
  const DialectCase cases[] = {
      {"a,b\n1.5,2\n", ',', '.'},
      {"a;b\n1,5;2\n", ';', ','},
      {"a;b\n1.5;2\n", ';', '.'},
      {"a\tb\n1,5\t2\n", '\t', ','},
      {"a\tb\n1.5\t2\n", '\t', '.'},
      // Whole numbers leave the decimal mark open, and nothing depends on it.
      {"a;b\n1;2\n", ';', '.'},
      // A comma in each name would fit as a separator too, were it not for the rows.
      {"cost, kr;area, m²\n1,5;2,25\n3,5;4,75\n", ';', ','},
      // Both separators fit every row; only one makes the cells numbers.
      {"a, b;c, d\n1,5;2,5\n3,5;4,5\n", ';', ','},
      // Commas in texts of a semicolon table.
      {"name;x\nSmall, north;1\nLarge, south;2\n", ';', '.'},
      {"name;note;x\na;one, two;1\nb;three;2\nc;four, five, six;3\n", ';', '.'},
      // Semicolons in texts of a comma table.
      {"name,note,x\na,one; two,1\nb,three,2\nc,\"four, five; six\",3\n", ',', '.'},
      // A decimal comma in a comma-separated table stands in quotes.
      {"a,b\n\"1,5\",2\n\"0,25\",3\n", ',', ','},
      // Separators inside quotes count for nothing.
      {"\"a;b;c\",d\n\"1;2;3\",4\n", ',', '.'},
      // One broken row does not change the separator.
      {"a;b;c\n1;2;3\n4,4,4;5\n6;7;8\n", ';', '.'},
  };
  for (const DialectCase& expected : cases) {
    CAPTURE(expected.text);
    const Result<Table> table = parse_csv(expected.text, "test.csv", {});
    if (!table) {
      CHECK_THAT(table.error().message, Catch::Contains("where the header has 3"));  // the broken row alone
      continue;
    }
    CHECK(table->dialect.separator == expected.separator);
    CHECK(table->dialect.decimal == expected.decimal);
  }
}

TEST_CASE("table: decimal commas are read as decimal commas", "[table][unit]") {
  const Table semicolons = read_valid("a;b\n1,5;-2\n+0,25;1e3\n12;3,5e-2\n");
  CHECK(semicolons.columns[0].numbers == std::vector<double>{1.5, 0.25, 12});
  CHECK(semicolons.columns[1].numbers == std::vector<double>{-2, 1000, 0.035});
  const Table commas = read_valid("a,b\n\"1,5\",2\n\" -0,25 \",\"3\"\n7,\"4,125e1\"\n");
  CHECK(commas.columns[0].numbers == std::vector<double>{1.5, -0.25, 7});
  CHECK(commas.columns[1].numbers == std::vector<double>{2, 3, 41.25});
}

TEST_CASE("table: given options override what the file suggests", "[table][unit]") {
  CsvOptions options;
  options.separator = ';';
  const Table one = read_valid("a,b\nx,2\ny,4\n", options);
  CHECK(one.columns.size() == 1);
  CHECK(one.columns[0].name == "a,b");
  options.separator = '\t';
  options.decimal = ',';
  const Table tabs = read_valid("a\tb\n1,234\t2\n", options);
  CHECK(tabs.columns[0].numbers[0] == 1.234);
}

TEST_CASE("table: a number that may have a decimal or a thousands mark is never guessed at", "[table][unit]") {
  for (const char* text :
       {"a;b\n1,234;2\n12,500;3\n", "a;b\n1.234;2\n12.500;3\n", "a,b\n\"1,234\",2\n", "a\tb\n980\tx\n1,234\ty\n"}) {
    CAPTURE(text);
    const Error error = read_invalid(text);
    CHECK(error.kind == ErrorKind::data);
    CHECK_THAT(error.message, Catch::Contains(" may mean 1.234 or 1234"));
    CHECK_THAT(error.hint, Catch::Contains("data.decimal = \""));
  }
  CHECK(read_invalid("a\tb\n980\tx\n1,234\ty\n").where == "test.csv, line 3, column 'a'");
}

TEST_CASE("table: one number that can be read in one way only settles the decimal mark", "[table][unit]") {
  CHECK(read_valid("a;b\n1,234;2\n12,5;3\n").columns[0].numbers[0] == 1.234);
  CHECK(read_valid("a;b\n1,234;0,5\n12,500;3\n").columns[0].numbers[1] == 12.5);
  CHECK(read_valid("a;b\n0.234;2\n12.500;3\n").columns[0].numbers[1] == 12.5);
  // In a comma-separated table a point cannot group digits.
  CHECK(read_valid("a,b\n1.234,2\n12.500,3\n").columns[0].numbers[0] == 1.234);
  // Far behind the first rows.
  std::string text = "a;b\n";
  for (int i = 0; i < 2000; ++i) text += "1,234;2\n";
  const Error open = read_invalid(text);
  CHECK(open.where == "test.csv, line 2, column 'a'");
  const Table table = read_valid(text + "7;2,5\n");
  CHECK(table.columns[0].numbers[0] == 1.234);
  CHECK(table.columns[1].numbers[2000] == 2.5);
}

TEST_CASE("table: an open number in a text column or under a given mark disturbs nobody", "[table][unit]") {
  CHECK(read_valid("a;b\n1,234;2\nx;3\ny;4\nz;5\n").columns[0].type == ColumnType::text);
  CsvOptions options;
  options.text = {"a"};
  CHECK(read_valid("a;b\n1,234;2\n", options).columns[0].levels.front() == "1,234");
  options = {};
  options.decimal = '.';
  CHECK(read_valid("a;b\n1.234;2\n", options).columns[0].numbers[0] == 1.234);
  CHECK_THAT(read_invalid("a;b\n1,234;2\n", options).message, Catch::Contains("thousands separators"));
}

TEST_CASE("table: with both marks in a file, whole columns decide between them", "[table][unit]") {
  const Table table = read_valid("version;x;y\nv 1.5;1,5;2,5\nv 2.5;2,25;3,5\n");
  CHECK(table.dialect.decimal == ',');
  CHECK(table.columns[1].numbers[1] == 2.25);
  const Error error = read_invalid("version;x;y\n1.5;1,5;2,5\n2.5;2,25;3,5\n");
  CHECK(error.where == "test.csv, line 2, column 'version'");
  CHECK_THAT(error.message,
             Catch::Contains("'1.5' has a decimal point, while the decimal mark of the file is the comma"));
  CHECK_THAT(error.hint, Catch::Contains("data.text = [\"version\"]"));
}

TEST_CASE("table: a line break in a quoted cell does not confuse the sample", "[table][unit]") {
  const Table table = read_valid("name;x\n\"a,\nb,\";1,5\n\"c;\nd\";2,5\n");
  CHECK(table.dialect.separator == ';');
  CHECK(table.columns[1].numbers == std::vector<double>{1.5, 2.5});
}

}  // namespace

}  // namespace formsieve::table::test

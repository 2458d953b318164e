#include "tables.hpp"

#include <cmath>

namespace formsieve::table::test {

namespace {

using Texts = std::vector<std::string>;
using Numbers = std::vector<double>;
using Lines = std::vector<std::uint64_t>;

TEST_CASE("table: records end in CR LF, RFC 4180 section 2 rule 1", "[table][unit]") {
  const Table table = read_valid("one,two,three\r\naaa,bbb,ccc\r\nzzz,yyy,xxx\r\n");
  REQUIRE(table.n_rows == 2);
  CHECK(texts(table.columns[0]) == Texts{"aaa", "zzz"});
  CHECK(texts(table.columns[2]) == Texts{"ccc", "xxx"});
}

TEST_CASE("table: the last record may lack its line break, RFC 4180 section 2 rule 2", "[table][unit]") {
  const Table table = read_valid("one,two,three\r\naaa,bbb,ccc\r\nzzz,yyy,xxx");
  REQUIRE(table.n_rows == 2);
  CHECK(texts(table.columns[2]) == Texts{"ccc", "xxx"});
}

TEST_CASE("table: the first line names the fields, RFC 4180 section 2 rule 3", "[table][unit]") {
  const Table table = read_valid("field_name,field_name_2,field_name_3\r\naaa,bbb,ccc\r\nzzz,yyy,xxx\r\n");
  CHECK(table.columns[1].name == "field_name_2");
  CHECK(table.find("field_name_3") == 2);
  CHECK_FALSE(table.find("field_name_4").has_value());
  CHECK_FALSE(table.find("FIELD_NAME_3").has_value());
}

TEST_CASE("table: fields may be quoted or not, RFC 4180 section 2 rule 5", "[table][unit]") {
  const Table table = read_valid("a,b,c\r\n\"aaa\",\"bbb\",\"ccc\"\r\nzzz,yyy,xxx");
  CHECK(texts(table.columns[0]) == Texts{"aaa", "zzz"});
  CHECK(texts(table.columns[2]) == Texts{"ccc", "xxx"});
}

TEST_CASE("table: quoted fields hold line breaks, RFC 4180 section 2 rule 6", "[table][unit]") {
  const Table table = read_valid("a,b,c\r\n\"aaa\",\"b \r\nbb\",\"ccc\"\r\nzzz,yyy,xxx");
  CHECK(texts(table.columns[1]) == Texts{"b \r\nbb", "yyy"});
  CHECK(table.line_of_row == Lines{2, 4});
}

TEST_CASE("table: a quote in a quoted field is doubled, RFC 4180 section 2 rule 7", "[table][unit]") {
  const Table table = read_valid("a,b,c\r\n\"aaa\",\"b\"\"bb\",\"ccc\"\r\n\"\"\"\",\"x\"\"\",\"\"\"y\"\r\n");
  CHECK(texts(table.columns[1]) == Texts{"b\"bb", "x\""});
  CHECK(texts(table.columns[0]) == Texts{"aaa", "\""});
  CHECK(texts(table.columns[2]) == Texts{"ccc", "\"y"});
}

TEST_CASE("table: quoted fields hold separators", "[table][unit]") {
  const Table table = read_valid("name,area\n\"store, north\",12\n\"store; south\",7\n");
  CHECK(texts(table.columns[0]) == Texts{"store, north", "store; south"});
  CHECK(table.columns[1].numbers == Numbers{12, 7});
}

TEST_CASE("table: LF, CR LF and a mixture of both end rows", "[table][unit]") {
  for (const char* text : {"a,b\n1,2\n3,4\n", "a,b\r\n1,2\r\n3,4\r\n", "a,b\r\n1,2\n3,4\r\n", "a,b\n1,2\n3,4"}) {
    const Table table = read_valid(text);
    CHECK(table.columns[0].numbers == Numbers{1, 3});
    CHECK(table.columns[1].numbers == Numbers{2, 4});
    CHECK(table.line_of_row == Lines{2, 3});
  }
}

TEST_CASE("table: a byte order mark is no part of the first name", "[table][unit]") {
  const Table with = read_valid(
      "\xEF\xBB\xBF"
      "fläche,b\n1,2\n");
  CHECK(with.columns[0].name == "fläche");
  CHECK(with.dialect.byte_order_mark);
  CHECK(with.line_of_row == Lines{2});
  CHECK_FALSE(read_valid("fläche,b\n1,2\n").dialect.byte_order_mark);
}

TEST_CASE("table: blanks around cells are trimmed and those inside quotes kept", "[table][unit]") {
  const Table table = read_valid(" a , \"b\" ,\tc\t\n 1 ,\"x \", p q \n\t+2,  \" y\"\t,\tr\n");
  CHECK(table.columns[0].name == "a");
  CHECK(table.columns[1].name == "b");
  CHECK(table.columns[2].name == "c");
  CHECK(table.columns[0].numbers == Numbers{1, 2});
  CHECK(texts(table.columns[1]) == Texts{"x ", " y"});
  CHECK(texts(table.columns[2]) == Texts{"p q", "r"});
}

TEST_CASE("table: with tabs as separators, tabs are no blanks", "[table][unit]") {
  const Table table = read_valid("a\tb\tc\n1\t\t 3 \n\t5\t\n");
  CHECK(table.dialect.separator == '\t');
  CHECK(table.columns[0].numbers[0] == 1);
  CHECK(std::isnan(table.columns[0].numbers[1]));
  CHECK(table.columns[1].n_missing == 1);
  CHECK(table.columns[2].numbers[0] == 3);
  CHECK(table.columns[2].n_missing == 1);
}

TEST_CASE("table: the default markers are missing values, quoted or not", "[table][unit]") {
  const Table table = read_valid("x,y\n1,a\n,NA\nNA,\nN/A,b\nnull,.\n.,\"\"\n-,\"NA\"\n\"\",c\n\" NA \",-\n2,null\n");
  CHECK(table.columns[0].type == ColumnType::numeric);
  CHECK(table.columns[0].n_missing == 8);
  CHECK(table.columns[0].numbers[0] == 1);
  CHECK(std::isnan(table.columns[0].numbers[5]));
  CHECK(table.columns[0].numbers[9] == 2);
  CHECK(table.columns[1].n_missing == 7);
  CHECK(texts(table.columns[1])[1] == "<missing>");
  CHECK(table.columns[1].levels == Texts{"a", "b", "c"});
}

TEST_CASE("table: missing markers are those of the caller, compared as written", "[table][unit]") {
  CsvOptions options;
  options.missing = {"-999", "none"};
  const Table table = read_valid("x,y\n1,none\n-999,b\n-999.0,None\nnone,-999\n", options);
  CHECK(table.columns[0].n_missing == 2);
  CHECK(table.columns[0].numbers[2] == -999);
  CHECK(std::isnan(table.columns[0].numbers[1]));
  CHECK(texts(table.columns[1]) == Texts{"<missing>", "b", "None", "<missing>"});
}

TEST_CASE("table: an empty cell that is no missing marker is a text", "[table][unit]") {
  CsvOptions options;
  options.missing = {"NA"};
  CHECK(texts(read_valid("x,y\na,1\n,2\n", options).columns[0]) == Texts{"a", ""});
  const Error error = read_invalid("x,y\n3,1\n,2\n4,5\n", options);
  CHECK(error.where == "test.csv, line 3, column 'x'");
  CHECK_THAT(error.message, Catch::Contains("an empty cell is not a number"));
  CHECK_THAT(error.hint, Catch::Contains("data.missing = [\"NA\", \"\"]"));
}

TEST_CASE("table: a column without any value is numeric and all missing", "[table][unit]") {
  const Table table = read_valid("x,y\n1,\n2,NA\n");
  CHECK(table.columns[1].type == ColumnType::numeric);
  CHECK(table.columns[1].n_missing == 2);
  CHECK(table.columns[1].numbers.size() == 2);
}

TEST_CASE("table: a last cell that is empty at the very end of the file is a missing value", "[table][unit]") {
  for (const char* text : {"x,y\n1,2\n3,", "x,y\n1,2\n3,\n", "x,y\r\n1,2\r\n3,\r\n", "x,y\n1,2\n3,\"\""}) {
    const Table table = read_valid(text);
    CHECK(table.n_rows == 2);
    CHECK(table.columns[0].numbers == Numbers{1, 3});
    CHECK(table.columns[1].n_missing == 1);
  }
}

TEST_CASE("table: a row of separators alone is a row of missing values", "[table][unit]") {
  const Table table = read_valid("x,y\n1,2\n,\n3,4\n");
  CHECK(table.n_rows == 3);
  CHECK(table.columns[0].n_missing == 1);
  CHECK(table.columns[1].n_missing == 1);
}

TEST_CASE("table: levels are numbered in order of first appearance", "[table][unit]") {
  const Table table = read_valid("kind\npear\napple\npear\nNA\nplum\napple\n");
  CHECK(table.columns[0].levels == Texts{"pear", "apple", "plum"});
  CHECK(table.columns[0].codes == std::vector<std::uint32_t>{0, 1, 0, kMissingLevel, 2, 1});
  CHECK(table.columns[0].n_missing == 1);
  CHECK(table.columns[0].numbers.empty());
}

TEST_CASE("table: a column declared as text keeps its numbers as written", "[table][unit]") {
  CsvOptions options;
  options.text = {"code"};
  const Table table = read_valid("code,x\n007,1\n7,2\n1e3,3\nNA,4\n007,5\n", options);
  CHECK(texts(table.columns[0]) == Texts{"007", "7", "1e3", "<missing>", "007"});
  CHECK(table.columns[1].type == ColumnType::numeric);
}

TEST_CASE("table: a column that becomes text behind the sampled rows is text from its first row", "[table][unit]") {
  std::string text = "x,code\n";
  for (int i = 0; i < 1500; ++i) text += "1,7\n";
  for (int i = 0; i < 1800; ++i) text += "2,B" + std::to_string(i % 5) + "\n";
  const Table table = read_valid(text);
  REQUIRE(table.n_rows == 3300);
  REQUIRE(table.columns[1].type == ColumnType::text);
  CHECK(table.columns[1].levels == Texts{"7", "B0", "B1", "B2", "B3", "B4"});
  CHECK(texts(table.columns[1])[1499] == "7");
  CHECK(texts(table.columns[1])[1501] == "B1");
  CHECK(table.columns[0].numbers[3299] == 2);
  CHECK(table.line_of_row[3299] == 3301);
}

TEST_CASE("table: lines without content at the end of the file are no rows", "[table][unit]") {
  for (const char* text : {"a,b\n1,2\n\n", "a,b\n1,2\n\r\n\r\n", "a,b\n1,2\n  \n\t\n", "a,b\r\n1,2\r\n \r\n  "})
    CHECK(read_valid(text).n_rows == 1);
  CHECK(read_valid("a\tb\n1\t2\n\t\n").n_rows == 2);  // a row of two missing cells, when tabs separate
}

TEST_CASE("table: an empty line in a table of one column is a missing value", "[table][unit]") {
  const Table table = read_valid("x\n1\n\n3\n\n");
  CHECK(table.n_rows == 3);
  CHECK(table.columns[0].n_missing == 1);
}

TEST_CASE("table: a name may hold separators, quotes and line breaks when quoted", "[table][unit]") {
  const Table table = read_valid("\"a, \"\"b\"\"\",\"c\nd\",2019\n1,2,3\n");
  CHECK(table.columns[0].name == "a, \"b\"");
  CHECK(table.columns[1].name == "c\nd");
  CHECK(table.line_of_row == Lines{3});
  CHECK(read_valid("\"2019\",\"2020\"\n1,2\n").columns[1].name == "2020");
}

TEST_CASE("table: the fingerprint is that of the whole file", "[table][unit]") {
  // sha256sum of the bytes, GNU coreutils 9.1.
  CHECK(read_valid("a,b\n1,2\n").sha256 == "492d5ea496056f1a6a6592241032fab764c321596317930b4fa0e1e8bc3b7470");
}

TEST_CASE("table: options that name no column or character are refused", "[table][unit]") {
  CsvOptions options;
  options.text = {"kode"};
  const Error no_column = read_invalid("code,x\n1,2\n", options);
  CHECK(no_column.kind == ErrorKind::usage);
  CHECK_THAT(no_column.message, Catch::Contains("'kode'"));
  CHECK_THAT(no_column.hint, Catch::Contains("'code', 'x'"));
  options = {};
  options.separator = '|';
  CHECK(read_invalid("a|b\n1|2\n", options).kind == ErrorKind::usage);
  options = {};
  options.decimal = '\'';
  CHECK(read_invalid("a,b\n1,2\n", options).kind == ErrorKind::usage);
}

}  // namespace

}  // namespace formsieve::table::test

// A text read as a stream of blocks against the same text read whole.
#include "random_text.hpp"
#include "tables.hpp"

#include "table/row_stream.hpp"

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <sstream>

namespace formsieve::table::test {

namespace {

constexpr std::size_t kBlockSizes[] = {1, 2, 3, 7, 16, 61, 1000, std::size_t{1} << 20};

/// Hands out a text in pieces of `piece` bytes, as a pipe may.
ByteReader pieces_of(const std::string& text, std::size_t piece) {
  return [&text, piece, at = std::size_t{0}](std::span<char> into) mutable -> Result<std::size_t> {
    const std::size_t n = std::min({piece, into.size(), text.size() - at});
    std::copy_n(text.data() + at, n, into.data());
    at += n;
    return n;
  };
}

/// The columns of a table as a stream sees them, types given.
struct Streamed {
  std::vector<std::vector<double>> numbers;
  std::vector<std::vector<std::string>> texts;  ///< "<missing>" where a text is missing
  std::vector<std::vector<std::string>> written;
  std::size_t n_rows = 0;
};

Result<Streamed> stream_all(const std::string& text, const CsvOptions& options, const std::vector<ReadAs>& read_as,
                            std::size_t block_bytes, std::size_t piece) {
  RowStream stream(pieces_of(text, piece), "test.csv", options, block_bytes);
  if (Status status = stream.open(); !status) return status.error();
  const std::size_t n_columns = stream.header().size();
  Streamed all;
  all.numbers.resize(n_columns);
  all.texts.resize(n_columns);
  all.written.resize(n_columns);
  for (;;) {
    Result<std::optional<RowBlock>> block = stream.next();
    if (!block) return block.error();
    if (!*block) return all;
    CHECK((*block)->first_row == all.n_rows);
    const std::size_t n = (*block)->n_rows;
    std::vector<std::vector<double>> numbers(n_columns, std::vector<double>(n));
    std::vector<std::vector<std::uint32_t>> codes(n_columns, std::vector<std::uint32_t>(n));
    std::vector<std::vector<std::string_view>> cells(n_columns, std::vector<std::string_view>(n));
    std::vector<ColumnSink> sinks;
    for (std::size_t c = 0; c < n_columns; ++c) {
      const ReadAs as = c < read_as.size() ? read_as[c] : ReadAs::written;
      sinks.push_back({as, as == ReadAs::number ? numbers[c].data() : nullptr,
                       as == ReadAs::text ? codes[c].data() : nullptr, cells[c].data()});
    }
    const Result<BlockReading> reading = stream.read(**block, sinks);
    if (!reading) return reading.error();
    all.n_rows += n;
    for (std::size_t c = 0; c < n_columns; ++c)
      for (std::size_t i = 0; i < n; ++i) {
        all.written[c].emplace_back(cells[c][i]);
        if (sinks[c].read_as == ReadAs::number) all.numbers[c].push_back(numbers[c][i]);
        if (sinks[c].read_as == ReadAs::text)
          all.texts[c].emplace_back(
              codes[c][i] == kMissingLevel ? "<missing>" : reading->columns[c].texts.levels()[codes[c][i]].text);
      }
  }
}

std::vector<ReadAs> types_of(const Table& table) {
  std::vector<ReadAs> types;
  for (const Column& column : table.columns)
    types.push_back(column.type == ColumnType::text ? ReadAs::text : ReadAs::number);
  return types;
}

bool same_numbers(const std::vector<double>& a, const std::vector<double>& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(),
                    [](double x, double y) { return x == y || (std::isnan(x) && std::isnan(y)); });
}

std::string sentence(const Error& error) { return error.message + " | " + error.where + " | " + error.hint; }

}  // namespace

TEST_CASE("table: a stream of any block size reads random tables as they are read whole", "[table][property]") {
  std::mt19937_64 random(21);
  for (int i = 0; i < 120; ++i) {
    const RandomText expected = random_text(random, 1 + random() % 30);
    CAPTURE(i, expected.text);
    CsvOptions options;
    options.separator = expected.separator;
    options.decimal = expected.decimal;
    const Table whole = read_valid(expected.text, options);
    for (const std::size_t block_bytes : kBlockSizes) {
      const auto streamed = stream_all(expected.text, options, types_of(whole), block_bytes, 1 + random() % 50);
      if (!streamed) FAIL(sentence(streamed.error()));
      REQUIRE(streamed->n_rows == whole.n_rows);
      for (std::size_t c = 0; c < whole.columns.size(); ++c) {
        if (whole.columns[c].type == ColumnType::numeric)
          REQUIRE(same_numbers(streamed->numbers[c], whole.columns[c].numbers));
        else
          REQUIRE(streamed->texts[c] == texts(whole.columns[c]));
      }
    }
  }
}

TEST_CASE("table: a stream gives the error of a whole reading, wherever its blocks end", "[table][property]") {
  const std::string folder = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/table/malformed/";
  std::size_t n_same = 0;
  for (const auto& entry : std::filesystem::directory_iterator(folder)) {
    if (entry.path().extension() != ".csv") continue;
    std::ostringstream bytes;
    bytes << std::ifstream(entry.path(), std::ios::binary).rdbuf();
    const std::string text = bytes.str();
    const Error whole = read_invalid(text);
    CAPTURE(entry.path().filename().string(), whole.message);
    // Types are given to a stream: what a column is, is no question there.
    if (whole.message.find("values in this column") != std::string::npos) continue;
    for (const std::size_t block_bytes : kBlockSizes) {
      const auto streamed = stream_all(text, {}, {}, block_bytes, 13);
      if (streamed.ok()) continue;
      CHECK(sentence(streamed.error()) == sentence(whole));
      ++n_same;
    }
  }
  CHECK(n_same > 200);
}

TEST_CASE("table: a stray text in a column of numbers is told with line and column", "[table][unit]") {
  const std::string text = "id,x,y\na,1,2\n\"b\nc\",2,3\nd,3,four\ne,five,6\n";
  for (const std::size_t block_bytes : kBlockSizes) {
    const auto streamed = stream_all(text, {}, {ReadAs::written, ReadAs::number, ReadAs::number}, block_bytes, 5);
    REQUIRE_FALSE(streamed.ok());
    CHECK(streamed.error().where == "test.csv, line 5, column 'y'");
    CHECK(streamed.error().message == "'four' is not a number");
    CHECK_THAT(streamed.error().hint, Catch::Contains("\"four\""));
  }
}

TEST_CASE("table: cells are kept as they are written beside what they mean", "[table][unit]") {
  const std::string text = "id,x\n\"a,1\", 1.50\nb,NA\n c ,\"2\"\n";
  const auto streamed = stream_all(text, {}, {ReadAs::written, ReadAs::number}, 4, 3);
  REQUIRE(streamed.ok());
  CHECK(streamed->written[0] == std::vector<std::string>{"\"a,1\"", "b", " c "});
  CHECK(streamed->written[1] == std::vector<std::string>{"1.50", "NA", "\"2\""});
}

TEST_CASE("table: blank lines at the end of a stream are no rows, in the middle a fault", "[table][unit]") {
  const std::vector<ReadAs> read_as = {ReadAs::number, ReadAs::number};
  for (const std::size_t block_bytes : kBlockSizes) {
    const auto at_end = stream_all("a,b\n1,2\n3,4\n\n \n\r\n", {}, read_as, block_bytes, 2);
    REQUIRE(at_end.ok());
    CHECK(at_end->n_rows == 2);
    const auto middle = stream_all("a,b\n1,2\n\n\n3,4\n", {}, read_as, block_bytes, 2);
    REQUIRE_FALSE(middle.ok());
    CHECK(middle.error().where == "test.csv, line 3");
    const auto none = stream_all("a,b\n\n\n", {}, read_as, block_bytes, 2);
    REQUIRE_FALSE(none.ok());
    CHECK_THAT(none.error().message, Catch::Contains("no rows"));
  }
}

TEST_CASE("table: a stream does not guess what a mark beyond its first block means", "[table][unit]") {
  std::string text = "a;b\n";
  while (text.size() < kDialectBytes + 100) text += "12;34\n";
  const std::vector<ReadAs> read_as = {ReadAs::number, ReadAs::number};
  const auto open = stream_all(text + "1;1.234\n", {}, read_as, 1 << 16, 1 << 16);
  REQUIRE_FALSE(open.ok());
  CHECK_THAT(open.error().message, Catch::Contains("'1.234'"));
  CHECK_THAT(open.error().hint, Catch::Contains("--decimal"));
  CHECK_THAT(open.error().where, Catch::Contains("column 'b'"));
  CsvOptions point;
  point.decimal = '.';
  const auto told = stream_all(text + "1;1.234\n", point, read_as, 1 << 16, 1 << 16);
  REQUIRE(told.ok());
  CHECK(told->numbers[1].back() == 1.234);
}

TEST_CASE("table: a quote that is never closed ends a stream, not the memory", "[table][slow]") {
  const std::string text = "a,b\n1,\"" + std::string(3 * kLongestRow, 'x');
  const auto streamed = stream_all(text, {}, {ReadAs::number}, 1 << 20, 1 << 20);
  REQUIRE_FALSE(streamed.ok());
  CHECK_THAT(streamed.error().message, Catch::Contains("never closed"));
  CHECK(streamed.error().where == "test.csv, line 2");
}

}  // namespace formsieve::table::test

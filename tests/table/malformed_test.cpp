// The malformed tables of the folder malformed/, each with the error that expected.txt says it must give.
#include "tables.hpp"

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <sstream>

namespace formsieve::table::test {

namespace {

const std::string kFolder = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/table/malformed/";

struct Expected {
  std::string file, place, message, hint;
};

/// Lines "file | place | part of the message | part of the hint"; '#' starts a comment.
std::vector<Expected> read_expected() {
  std::vector<Expected> cases;
  std::ifstream manifest(kFolder + "expected.txt");
  REQUIRE(manifest.good());
  for (std::string line; std::getline(manifest, line);) {
    if (line.empty() || line.front() == '#') continue;
    std::vector<std::string> fields;
    for (std::size_t at = 0; at != std::string::npos;) {
      const std::size_t bar = line.find(" | ", at);
      fields.push_back(line.substr(at, bar - at));
      at = bar == std::string::npos ? bar : bar + 3;
    }
    CAPTURE(line);
    REQUIRE(fields.size() == 4);
    cases.push_back({fields[0], fields[1], fields[2], fields[3]});
  }
  return cases;
}

/// Where the error must say it is: the file alone ("file"), or the file and a place in it.
std::string place(const std::string& path, const Expected& expected) {
  return expected.place == "file" ? path : path + ", " + expected.place;
}

TEST_CASE("table: every malformed table gives its own error with place and remedy", "[table][unit]") {
  const std::vector<Expected> cases = read_expected();
  CHECK(cases.size() >= 40);
  for (const Expected& expected : cases) {
    for (const unsigned threads : {1U, 2U, 4U}) {
      CAPTURE(expected.file, threads);
      CsvOptions options;
      options.threads = threads;
      const std::string path = kFolder + expected.file;
      const Result<Table> table = read_csv(path, options);
      REQUIRE_FALSE(table.ok());
      CHECK(table.error().kind == ErrorKind::data);
      CHECK(table.error().where == place(path, expected));
      CHECK_THAT(table.error().message, Catch::Contains(expected.message));
      CHECK_THAT(table.error().hint, Catch::Contains(expected.hint));
    }
  }
}

TEST_CASE("table: no malformed table is left out of the list", "[table][unit]") {
  const std::vector<Expected> cases = read_expected();
  std::size_t n_files = 0;
  for (const auto& entry : std::filesystem::directory_iterator(kFolder)) {
    const std::string name = entry.path().filename().string();
    if (name == "expected.txt" || name.front() == '.') continue;
    ++n_files;
    CAPTURE(name);
    CHECK(std::count_if(cases.begin(), cases.end(), [&](const Expected& one) { return one.file == name; }) == 1);
  }
  CHECK(n_files == cases.size());
}

TEST_CASE("table: malformed tables give the same error whatever the blocks", "[table][property]") {
  for (const Expected& expected : read_expected()) {
    CAPTURE(expected.file);
    std::ostringstream bytes;
    bytes << std::ifstream(kFolder + expected.file, std::ios::binary).rdbuf();
    const std::string text = bytes.str();
    for (const std::size_t block_bytes : {1, 2, 5, 16, 64}) {
      const Result<Table> table = parse_csv(text, "test.csv", {}, block_bytes);
      REQUIRE_FALSE(table.ok());
      CHECK(table.error().where == place("test.csv", expected));
      CHECK_THAT(table.error().message, Catch::Contains(expected.message));
    }
  }
}

}  // namespace

}  // namespace formsieve::table::test

#include "tables.hpp"
#include "temporary_file.hpp"

#include "table/hash.hpp"

#include <filesystem>

#include <sys/stat.h>

namespace formsieve::table::test {

namespace {

Error error_of(const std::string& path) {
  const Result<Table> table = read_csv(path);
  REQUIRE_FALSE(table.ok());
  return table.error();
}

TEST_CASE("table: SHA-256 has the published values", "[table][reference]") {
  // FIPS 180-4 example "abc" and its two-block example; the empty text: NIST CSRC example values.
  CHECK(sha256_hex("abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  CHECK(sha256_hex("abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq") ==
        "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1");
  CHECK(sha256_hex("") == "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
}

TEST_CASE("table: the fingerprint of a file is that of its bytes", "[table][unit]") {
  const std::string content(3'000'000, 'x');
  const TemporaryFile file(content);
  const Result<std::string> sha256 = sha256_hex_of_file(file.path());
  REQUIRE(sha256.ok());
  CHECK(*sha256 == sha256_hex(content));
  CHECK_FALSE(sha256_hex_of_file(file.path() + ".none").ok());
}

TEST_CASE("table: a file is read as its bytes are", "[table][unit]") {
  // More than one read and one block.
  std::string text = "x,kind,y\n";
  for (int i = 0; text.size() < 6'000'000; ++i)
    text += std::to_string(i) + ".25,k" + std::to_string(i % 7) + ",-1e-3\n";
  const TemporaryFile file(text);
  for (const unsigned threads : {1U, 2U, 4U}) {
    CsvOptions options;
    options.threads = threads;
    const Result<Table> table = read_csv(file.path(), options);
    REQUIRE(table.ok());
    CHECK(table->source == file.path());
    CHECK(table->sha256 == sha256_hex(text));
    for (std::size_t row = 0; row < table->n_rows; ++row) {
      if (table->columns[0].numbers[row] != static_cast<double>(row) + 0.25) FAIL("row " << row);
      if (table->columns[1].codes[row] != row % 7) FAIL("row " << row);
      if (table->line_of_row[row] != row + 2) FAIL("row " << row);
    }
  }
}

TEST_CASE("table: a file that is not there is an error that names it", "[table][unit]") {
  const Error error = error_of("no-such-folder/coldstores.csv");
  CHECK(error.kind == ErrorKind::io);
  CHECK(error.message == "there is no file 'no-such-folder/coldstores.csv'");
  CHECK(error.where == "no-such-folder/coldstores.csv");
  CHECK_FALSE(error.hint.empty());
  CHECK(error_of("").kind == ErrorKind::io);
}

TEST_CASE("table: a folder, a device and a pipe are refused at once", "[table][unit]") {
  const Error folder = error_of(std::filesystem::temp_directory_path().string());
  CHECK(folder.kind == ErrorKind::io);
  CHECK(folder.message == "this is a folder, not a file");
  CHECK_THAT(error_of("/dev/zero").message, Catch::Contains("not an ordinary file"));
  const std::string pipe = TemporaryFile().path() + ".pipe";
  REQUIRE(::mkfifo(pipe.c_str(), 0600) == 0);
  CHECK_THAT(error_of(pipe).message, Catch::Contains("not an ordinary file"));
  std::filesystem::remove(pipe);
}

TEST_CASE("table: a file that may not be read is an error", "[table][unit]") {
  const TemporaryFile file("a,b\n1,2\n");
  REQUIRE(::chmod(file.path().c_str(), 0) == 0);
  constexpr uid_t kNobody = 65534;
  const bool is_root = ::geteuid() == 0;  // whom permissions do not bind
  if (is_root) REQUIRE(::seteuid(kNobody) == 0);
  const Result<Table> table = read_csv(file.path());
  if (is_root) REQUIRE(::seteuid(0) == 0);
  REQUIRE_FALSE(table.ok());
  CHECK(table.error().kind == ErrorKind::io);
  CHECK_THAT(table.error().message, Catch::Contains("permission denied"));
}

TEST_CASE("table: an empty file is an error", "[table][unit]") {
  for (const char* content : {"", "\xEF\xBB\xBF", "\n", " \r\n\t\n"}) {
    const TemporaryFile file(content);
    const Error error = error_of(file.path());
    CHECK(error.kind == ErrorKind::data);
    CHECK(error.message == "the file is empty");
    CHECK(error.where == file.path());
  }
}

}  // namespace

}  // namespace formsieve::table::test

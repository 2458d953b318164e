#include "table/encoding.hpp"

#include "tables.hpp"

#include "table/census.hpp"
#include "table/quoting.hpp"

#include <catch2/catch.hpp>

#include <cstdint>
#include <random>
#include <string>

namespace formsieve::table::test {

namespace {

using std::string_view_literals::operator""sv;

/// UTF-8 of a code point by RFC 3629, section 3.
std::string encode(std::uint32_t point) {
  const auto byte = [](std::uint32_t value) { return static_cast<char>(value); };
  if (point < 0x80) return {byte(point)};
  if (point < 0x800) return {byte(0xC0 | (point >> 6)), byte(0x80 | (point & 63))};
  if (point < 0x10000) return {byte(0xE0 | (point >> 12)), byte(0x80 | ((point >> 6) & 63)), byte(0x80 | (point & 63))};
  return {byte(0xF0 | (point >> 18)), byte(0x80 | ((point >> 12) & 63)), byte(0x80 | ((point >> 6) & 63)),
          byte(0x80 | (point & 63))};
}

TEST_CASE("table: exactly the UTF-8 of RFC 3629 is accepted when all code points are tried", "[table][reference]") {
  std::size_t n_wrong = 0;
  for (std::uint32_t point = 0; point < 0x1FFFFF; ++point) {
    const bool is_scalar = point <= 0x10FFFF && !(point >= 0xD800 && point <= 0xDFFF);
    const std::string bytes = encode(point);
    const std::size_t expected = is_scalar ? bytes.size() : 0;
    n_wrong += utf8_length(bytes, 0) != expected ? 1 : 0;
  }
  CHECK(n_wrong == 0);
}

TEST_CASE("table: ill-formed UTF-8 is refused", "[table][unit]") {
  for (const std::string_view bytes :
       {"\x80"sv, "\xBF"sv, "\xC0\x80"sv, "\xC1\xBF"sv, "\xC2"sv, "\xC2 "sv, "\xE0\x80\x80"sv, "\xE0\x9F\xBF"sv,
        "\xE2\x82"sv, "\xE2\x82 "sv, "\xED\xA0\x80"sv, "\xF0\x80\x80\x80"sv, "\xF0\x8F\xBF\xBF"sv, "\xF4\x90\x80\x80"sv,
        "\xF0\x9D\x9B"sv, "\xF5\x80\x80\x80"sv, "\xFE"sv, "\xFF"sv}) {
    CAPTURE(show(bytes));
    CHECK(utf8_length(bytes, 0) == 0);
  }
}

/// The first fault of a text by looking at every byte in order.
std::optional<std::size_t> plain_first_fault(std::string_view text) {
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t length = text[at] == '\0' ? 0 : utf8_length(text, at);
    if (length == 0) return at;
    at += length;
  }
  return std::nullopt;
}

/// The same through blocks of a given size.
std::optional<std::size_t> first_fault_by_blocks(std::string_view text, std::size_t block_bytes) {
  for (std::size_t begin = 0; begin < text.size(); begin += block_bytes) {
    const Census census = take_census(text, 0, begin, std::min(begin + block_bytes, text.size()));
    if (census.fault) return census.fault->offset;
  }
  return std::nullopt;
}

TEST_CASE("table: the first byte fault is found whatever the blocks", "[table][property]") {
  std::mt19937_64 random(21);
  const std::string_view pieces[] = {"a"sv, "é"sv,    "零"sv,       "𝛼"sv,  "a"sv,
                                     "é"sv, "\x80"sv, "\xE2\x82"sv, "\0"sv, "\xF0\x9D"sv};
  for (int i = 0; i < 5000; ++i) {
    std::string text;
    const std::size_t n_kinds = i % 2 == 0 ? 4 : 10;
    for (std::size_t n = 1 + random() % 12; n > 0; --n) text += pieces[random() % n_kinds];
    CAPTURE(show(text));
    const std::optional<std::size_t> expected = plain_first_fault(text);
    for (const std::size_t block_bytes : {1, 2, 3, 4, 5, 64})
      REQUIRE(first_fault_by_blocks(text, block_bytes) == expected);
  }
}

TEST_CASE("table: byte faults far into a file are found beside plain and non-ASCII text", "[table][unit]") {
  for (const std::string_view filler : {"abc,1\n"sv, "grün,1\n"sv}) {
    std::string text = "a,b\n";
    while (text.size() < 3 * 4096) text += filler;
    const std::size_t at = text.size() - 3;
    std::string with_nul = text;
    with_nul[at] = '\0';
    CHECK(find_byte_fault(with_nul, 0, text.size())->offset == at);
    CHECK(find_byte_fault(with_nul, 0, text.size())->kind == FaultKind::nul_byte);
    text[at] = '\xE9';
    CHECK(find_byte_fault(text, 0, text.size())->offset == at);
    CHECK(find_byte_fault(text, 0, text.size())->kind == FaultKind::invalid_utf8);
  }
}

TEST_CASE("table: files of other formats are named for what they are", "[table][unit]") {
  const std::pair<std::string_view, const char*> cases[] = {
      {"PK\x03\x04 and so on"sv, "a spreadsheet or a zip archive"},
      {"\x1F\x8B\x08\x00"sv, "gzip"},
      {"SQLite format 3\0 and so on"sv, "an SQLite database"},
      {"\xFF\xFE"
       "a\0,\0b\0\n\0"sv,
       "UTF-16"},
      {"\xFE\xFF\0a\0,\0b"sv, "UTF-16"},
      {"%PDF-1.7\n"sv, "a PDF document"},
      {"PAR1\x15\0\x15PAR1"sv, "a Parquet file"},
      {"\xFD\x37zXZ\0 "sv, "xz"}};
  for (const auto& [bytes, what] : cases) {
    CAPTURE(what);
    const Error error = read_invalid(bytes);
    CHECK(error.kind == ErrorKind::data);
    CHECK_THAT(error.message, Catch::Contains(what));
    CHECK_FALSE(error.hint.empty());
  }
  CHECK(read_valid("PAR1,PK\n1,2\n").columns[0].name == "PAR1");
}

TEST_CASE("table: texts are shown and typed so that they can be read and pasted", "[table][unit]") {
  CHECK(show("grün") == "'grün'");
  CHECK(show("a\nb\r\tc") == "'a\\nb\\r\\tc'");
  CHECK(show("\x01\xFF\0"sv) == "'\\x01\\xFF\\x00'");
  CHECK(show(std::string(100, 'x')) == "'" + std::string(60, 'x') + "…'");
  CHECK(toml_string("a\"b\\c\nd\x01") == "\"a\\\"b\\\\c\\nd\\u0001\"");
  CHECK(toml_list(std::vector<std::string>{"", "NA"}) == "[\"\", \"NA\"]");
}

}  // namespace

}  // namespace formsieve::table::test

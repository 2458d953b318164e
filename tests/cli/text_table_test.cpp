#include "lines.hpp"
#include "text_table.hpp"

#include <catch2/catch.hpp>

using namespace formsieve::cli;
using namespace formsieve::cli::testing;

namespace {

TextTable small_table() {
  TextTable table({{"column"}, {"n", true, 0, 1}, {"min", true, 0, 2}, {"max", true, 0, 2}});
  table.add_row({{"floor_area"}, {"1,420"}, {"120.5"}, {"48,210"}});
  table.add_row({{"√_fill"}, {"9"}, {"−1"}, {"100"}});
  return table;
}

}  // namespace

TEST_CASE("cli: a table aligns figures right and text left by display width", "[cli][unit]") {
  CHECK(small_table().draw(80, false) ==
        "column          n    min     max\n"
        "────────────────────────────────\n"
        "floor_area  1,420  120.5  48,210\n"
        "√_fill          9     −1     100\n");
  CHECK(small_table().natural_width() == 32);
}

TEST_CASE("cli: a table too wide for the screen is cut into bands that repeat the key", "[cli][unit]") {
  CHECK(small_table().draw(30, false) ==
        "column          n\n"
        "─────────────────\n"
        "floor_area  1,420\n"
        "√_fill          9\n"
        "\n"
        "column        min     max\n"
        "─────────────────────────\n"
        "floor_area  120.5  48,210\n"
        "√_fill         −1     100\n");
}

TEST_CASE("cli: a group is torn apart only when it does not fit alone", "[cli][unit]") {
  const std::string drawn = small_table().draw(20, false);
  CHECK(widest_line(drawn) <= 20);
  CHECK(std::count(drawn.begin(), drawn.end(), 'f') == 6);  // floor_area and √_fill in each of three bands
}

TEST_CASE("cli: a flexible column takes what the others leave and wraps", "[cli][unit]") {
  TextTable table({{"column"}, {"n", true, 0, 1}, {"why", false, 16, 1}});
  table.add_row({{"a"}, {"10"}, {"left-skewed, hence reflected"}});
  CHECK(table.draw(30, false) ==
        "column   n  why\n"
        "──────────────────────────────\n"
        "a       10  left-skewed, hence\n"
        "            reflected\n");
  CHECK(lines_of(table.draw(80, false)).size() == 3);
}

TEST_CASE("cli: text below a row is a sum broken at its signs", "[cli][unit]") {
  TextTable table({{"rank", true}, {"error", true, 0, 1}});
  table.add_row({{"1"}, {"12.3"}}, {"ln(a) + √(101 − b) + c"});
  CHECK(table.draw(26, false) ==
        "rank  error\n"
        "───────────\n"
        "   1   12.3\n"
        "      ln(a) + √(101 − b)\n"
        "      + c\n");
}

TEST_CASE("cli: long names in the key column wrap instead of crowding out the figures", "[cli][unit]") {
  TextTable table({{"column"}, {"n", true, 0, 1}});
  table.add_row({{"energy_use_of_the_northern_stores"}, {"7"}});
  const std::string drawn = table.draw(36, false);
  CHECK(widest_line(drawn) <= 36);
  CHECK(has(drawn, "energy_use_o  7"));
  CHECK(has(drawn, "\nf_the_northe\nrn_stores\n"));
}

TEST_CASE("cli: cells cannot break the table with control characters", "[cli][unit]") {
  TextTable table({{"column"}, {"n", true, 0, 1}});
  table.add_row({{"two\nlines\x1b[31m"}, {"7"}});
  const std::string drawn = table.draw(80, false);
  CHECK(lines_of(drawn).size() == 3);
  CHECK_FALSE(has(drawn, "\x1b"));
}

TEST_CASE("cli: colour does not move a column", "[cli][unit]") {
  TextTable plain({{"a"}, {"b", true, 0, 1}}), toned = plain;
  plain.add_row({{"x"}, {"1"}});
  toned.add_row({{"x", Tone::strong}, {"1", Tone::alarm}});
  std::string drawn = toned.draw(40, true);
  for (const char* code : {"\x1b[1m", "\x1b[2m", "\x1b[31m", "\x1b[0m"}) {
    for (std::size_t at = drawn.find(code); at != std::string::npos; at = drawn.find(code)) {
      drawn.erase(at, std::string(code).size());
    }
  }
  CHECK(drawn == plain.draw(40, false));
}

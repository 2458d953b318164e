#include "environment.hpp"
#include "terminal.hpp"

#include <catch2/catch.hpp>

#include <fcntl.h>
#include <unistd.h>

using namespace formsieve::cli;
using formsieve::cli::testing::Variable;

TEST_CASE("cli: a terminal's width is COLUMNS when that is a whole number", "[cli][unit]") {
  {
    const Variable columns("COLUMNS", "132");
    CHECK(look_at(kStandardError).width == 132);
  }
  {
    const Variable columns("COLUMNS", "7");  // nothing can be laid out in seven columns
    CHECK(look_at(kStandardError).width == kNarrowest);
  }
  const int null_device = open("/dev/null", O_WRONLY);
  {
    const Variable columns("COLUMNS", "wide");
    CHECK(look_at(null_device).width == kDefaultWidth);
  }
  {
    const Variable columns("COLUMNS", nullptr);
    CHECK(look_at(null_device).width == kDefaultWidth);
  }
  close(null_device);
}

TEST_CASE("cli: a file is no terminal and is never coloured", "[cli][unit]") {
  const int null_device = open("/dev/null", O_WRONLY);
  const Terminal terminal = look_at(null_device);
  CHECK_FALSE(terminal.is_terminal);
  CHECK_FALSE(terminal.colour);
  close(null_device);
}

TEST_CASE("cli: a pseudo-terminal is coloured unless NO_COLOR or a dumb terminal forbids it", "[cli][unit]") {
  const int controller = posix_openpt(O_RDWR | O_NOCTTY);
  REQUIRE(controller >= 0);
  REQUIRE(grantpt(controller) == 0);
  REQUIRE(unlockpt(controller) == 0);
  const int device = open(ptsname(controller), O_RDWR | O_NOCTTY);
  REQUIRE(device >= 0);
  const auto coloured = [device](const char* no_color, const char* term) {
    const Variable first("NO_COLOR", no_color), second("TERM", term);
    return look_at(device).colour;
  };
  CHECK(look_at(device).is_terminal);
  CHECK(coloured(nullptr, "xterm"));
  CHECK(coloured("", "xterm"));  // an empty NO_COLOR counts as unset
  CHECK_FALSE(coloured("1", "xterm"));
  CHECK_FALSE(coloured(nullptr, "dumb"));
  close(device);
  close(controller);
}

TEST_CASE("cli: display width counts columns, not bytes", "[cli][unit]") {
  CHECK(display_width("") == 0);
  CHECK(display_width("floor_area") == 10);
  CHECK(display_width("√(101 − x)²") == 11);
  CHECK(display_width("e\xCC\x81") == 1);                    // e and a combining acute accent
  CHECK(display_width("\xE5\x86\xB7\xE8\x94\xB5") == 4);     // two ideographs
  CHECK(display_width("\xF0\x9F\x8D\x8E") == 2);             // a pictograph
  CHECK(display_width("a\xFF\xC3z") == 4);                   // two stray bytes
  CHECK(display_width("\xC0\xAF") == 2);                     // an overlong slash is not a character
  CHECK(next_character("\xED\xA0\x80").valid == false);      // half a surrogate pair
  CHECK(next_character("\xF4\x90\x80\x80").valid == false);  // beyond U+10FFFF
}

TEST_CASE("cli: printable text cannot reach the terminal's controls", "[cli][unit]") {
  CHECK(printable("√(x) − 1") == "√(x) − 1");
  CHECK(printable("a\x1b[2Jb") == "a�[2Jb");
  CHECK(printable("line\nline\ttab\r") == "line�line�tab�");
  CHECK(printable("\xC2\x9B"
                  "31m") == "�31m");              // the one-character control sequence introducer
  CHECK(printable("\xE2\x80\xAEgnp") == "�gnp");  // right-to-left override
  CHECK(printable("\xFFz") == "�z");
}

TEST_CASE("cli: truncated text fits and marks the loss", "[cli][unit]") {
  CHECK(truncated("floor_area", 10) == "floor_area");
  CHECK(truncated("floor_area", 6) == "floor…");
  CHECK(truncated("√√√√", 3) == "√√…");
  CHECK(truncated("\xE5\x86\xB7\xE8\x94\xB5", 3) == "\xE5\x86\xB7…");
  CHECK(truncated("ab", 0).empty());
}

TEST_CASE("cli: padding fills up to the width and never cuts", "[cli][unit]") {
  CHECK(padded_right("√x", 4) == "√x  ");
  CHECK(padded_left("√x", 4) == "  √x");
  CHECK(padded_left("longer", 4) == "longer");
}

TEST_CASE("cli: paint adds nothing without colour", "[cli][unit]") {
  CHECK(paint("text", Tone::alarm, false) == "text");
  CHECK(paint("text", Tone::plain, true) == "text");
  CHECK(paint("", Tone::strong, true).empty());
  CHECK(paint("text", Tone::strong, true) == "\x1b[1mtext\x1b[0m");
}

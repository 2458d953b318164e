#include "terminal.hpp"
#include "wrapping.hpp"

#include <catch2/catch.hpp>

#include <algorithm>

using namespace formsieve::cli;
using Lines = std::vector<std::string>;

TEST_CASE("cli: prose is broken at spaces and never wider than asked", "[cli][unit]") {
  CHECK(wrapped("the cold store of the north", 10) == Lines{"the cold", "store of", "the north"});
  CHECK(wrapped("  two   spaces ", 20) == Lines{"two spaces"});
  CHECK(wrapped("", 10) == Lines{""});
  CHECK(wrapped("√√√√ √√", 4) == Lines{"√√√√", "√√"});
}

TEST_CASE("cli: a word longer than the line is cut between characters", "[cli][unit]") {
  CHECK(wrapped("an antidisestablishment", 8) == Lines{"an", "antidise", "stablish", "ment"});
  CHECK(wrapped("√√√√√", 2) == Lines{"√√", "√√", "√"});
  CHECK(wrapped("\xE5\x86\xB7\xE8\x94\xB5", 1) == Lines{"\xE5\x86\xB7", "\xE8\x94\xB5"});  // wider than any line
}

TEST_CASE("cli: a no-break space holds words together", "[cli][unit]") {
  CHECK(wrapped("form ln\xC2\xA0"
                "0.12 · x\xC2\xA0"
                "1.80",
                9) == Lines{"form", "ln 0.12 ·", "x 1.80"});
}

TEST_CASE("cli: an equation is broken before its signs and no term is torn apart", "[cli][unit]") {
  const std::string equation = "ln(y) = 3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill) + 0.5·rain";
  CHECK(wrapped_equation(equation, 40) ==
        Lines{"ln(y) = 3.21 + 0.84·ln(floor_area)", "− 0.12·√(101 − fill) + 0.5·rain"});
  for (std::size_t width = 20; width < 80; ++width) {
    for (const std::string& line : wrapped_equation(equation, width)) {
      CHECK(display_width(line) <= width);
      CHECK(std::count(line.begin(), line.end(), '(') == std::count(line.begin(), line.end(), ')'));
    }
  }
}

TEST_CASE("cli: a piece longer than the line is broken inside its brackets", "[cli][unit]") {
  const std::string equation = "y = 1.02 · exp(3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill))";
  CHECK(wrapped_equation(equation, 36) ==
        Lines{"y = 1.02 · exp(3.21", "+ 0.84·ln(floor_area)", "− 0.12·√(101 − fill))"});
  for (const std::string& line : wrapped_equation(equation, 6)) CHECK(display_width(line) <= 6);
}

TEST_CASE("cli: wrapping loses no letter", "[cli][property]") {
  const std::string equation = "cost² = (3.21 + 0.84·ln(a + 0.5) − 2.5e−7·(site = north coast))² + 1.04";
  const auto without_spaces = [](const std::string& text) {
    std::string rest;
    std::copy_if(text.begin(), text.end(), std::back_inserter(rest), [](char letter) { return letter != ' '; });
    return rest;
  };
  for (std::size_t width = 1; width < 90; ++width) {
    std::string joined;
    for (const std::string& line : wrapped_equation(equation, width)) joined += line;
    CHECK(without_spaces(joined) == without_spaces(equation));
  }
}

TEST_CASE("cli: unbalanced brackets in a name do no harm", "[cli][unit]") {
  CHECK(wrapped_equation("y = 1 + 2·area) + 3·(b", 80) == Lines{"y = 1 + 2·area) + 3·(b"});
  CHECK(wrapped_equation("((((((((((((((( + x", 8).size() >= 2);
}

TEST_CASE("cli: indented lines hang under the first", "[cli][unit]") {
  CHECK(indented({"a", "b"}, "– ", "  ") == "– a\n  b\n");
}

#include "failure.hpp"
#include "json_text.hpp"
#include "lines.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

TEST_CASE("cli: every kind of failure has its exit code", "[cli][unit]") {
  const auto code = [](ErrorKind kind, const std::string& where, bool named_input) {
    return exit_code_of({kind, "", where, ""}, "stores.csv", named_input);
  };
  CHECK(code(ErrorKind::usage, "", false) == 2);
  CHECK(code(ErrorKind::plan, "plan.toml:3:1", false) == 2);
  CHECK(code(ErrorKind::data, "stores.csv, line 7", false) == 3);
  CHECK(code(ErrorKind::io, "stores.csv", false) == 3);
  CHECK(code(ErrorKind::io, "plans/stores.csv, line 7", false) == 3);
  CHECK(code(ErrorKind::io, "stores.csv.run", false) == 1);
  CHECK(code(ErrorKind::io, "old_stores.csv", false) == 1);
  CHECK(code(ErrorKind::io, "stores.run", true) == 2);
  CHECK(code(ErrorKind::io, "stores.run", false) == 1);
  CHECK(code(ErrorKind::internal, "", false) == 1);
}

TEST_CASE("cli: an error is one line a part when it goes to a file", "[cli][unit]") {
  const Error error{ErrorKind::data, "'n.a.' is not a number", "stores.csv, line 7, column 'fill'",
                    "write --missing n.a. if it means that there is no value"};
  CHECK(error_text(error, "separator comma", false, false, 40) ==
        "error: 'n.a.' is not a number (stores.csv, line 7, column 'fill')\n"
        "fix: write --missing n.a. if it means that there is no value\n"
        "settings: separator comma\n");
  CHECK(error_text({ErrorKind::usage, "no", "", ""}, "", false, false, 80) == "error: no\n");
}

TEST_CASE("cli: an error is wrapped on a terminal and cannot drive it", "[cli][unit]") {
  const Error error{ErrorKind::data, "the cell '\x1b[2J' of a very long sentence is not a number", "stores.csv", ""};
  const std::string text = error_text(error, "", true, false, 30);
  CHECK(widest_line(text) <= 30);
  CHECK_FALSE(has(text, "\x1b"));
}

TEST_CASE("cli: text as JSON is escaped", "[cli][unit]") {
  CHECK(json_text("a \"b\"\\\n\t√") == "\"a \\\"b\\\"\\\\\\n\\t√\"");
  CHECK(json_text(std::string("\x01", 1)) == "\"\\u0001\"");
  CHECK(json_text("\xFF") == "\"�\"");
}

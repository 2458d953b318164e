#include "pipeline/plan_text.hpp"

#include <catch2/catch.hpp>
#include <string>
#include <toml++/toml.h>

namespace formsieve::pipeline {
namespace {

TEST_CASE("pipeline: strings and keys come back from TOML as they were", "[pipeline][property]") {
  for (const std::string text :
       {"plain", "", "a \"b\" \\ c", "tab\tline\nreturn\r\x7f\x01", "m² · ∛", "a.b", "a#b", "-_9"}) {
    INFO(text);
    const auto table = toml::parse(toml_key(text) + " = " + toml_string(text) + "\n");
    CHECK(table[text].value<std::string>() == text);
  }
  CHECK(toml_key("floor_area-2") == "floor_area-2");
  CHECK(toml_key("floor area") == "\"floor area\"");
  CHECK(toml_strings({"a", "b\""}) == R"(["a", "b\""])");
}

TEST_CASE("pipeline: remarks stand beside their setting and go on below", "[pipeline][unit]") {
  PlanText text;
  text.set("folds", "10", "parts");
  CHECK(text.text() == "folds = 10                        # parts\n");
  PlanText wrapped;
  std::string remark;
  for (int i = 0; i < 30; ++i) remark += "words ";
  wrapped.off("x", "1", remark);
  const std::string& lines = wrapped.text();
  CHECK(lines.starts_with("# x = 1                           # words"));
  CHECK(lines.find("\n                                  # words") != std::string::npos);
  CHECK(lines.find("words \n") == std::string::npos);
}

TEST_CASE("pipeline: a remark that has no room beside a long value stands above it", "[pipeline][unit]") {
  PlanText text;
  const std::string value = toml_string(std::string(80, 'q'));
  text.set("query", value, "the rows");
  CHECK(text.text() == "# the rows\nquery = " + value + "\n");
}

TEST_CASE("pipeline: remarks of a list line up, and the list parses", "[pipeline][unit]") {
  PlanText text;
  text.list("menu", {{"\"ln\"", "short"}, {"\"reciprocal\"", "long"}, {"\"sqrt\"", ""}});
  CHECK(text.text() ==
        "menu = [\n"
        "  \"ln\",          # short\n"
        "  \"reciprocal\",  # long\n"
        "  \"sqrt\",\n"
        "]\n");
  CHECK(toml::parse(text.text())["menu"].as_array()->size() == 3);
}

TEST_CASE("pipeline: characters that TOML forbids in comments become spaces", "[pipeline][unit]") {
  PlanText text;
  text.comment("a name\nwith a line end\x01 and more");
  CHECK(text.text() == "# a name with a line end and more\n");
}

}  // namespace
}  // namespace formsieve::pipeline

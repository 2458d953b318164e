#include <formsieve/run.hpp>

#include "run/duration.hpp"

#include <catch2/catch.hpp>

#include <limits>
#include <string>
#include <vector>

using namespace formsieve;
using run::parse_duration;

TEST_CASE("run: duration is seconds when read with any unit", "[run][unit]") {
  const std::vector<std::pair<std::string, double>> cases{
      {"8h", 28800},    {"90m", 5400},  {"45s", 45},        {"1.5h", 5400},  {"2d", 172800},
      {"30", 30},       {"0.25", 0.25}, {"90min", 5400},    {"1h30m", 5400}, {"1d 2h 3m 4s", 93784},
      {" 8 h ", 28800}, {".5h", 1800},  {"1h 30min", 5400}, {"2m30s", 150},  {"3650d", 315360000}};
  for (const auto& [text, seconds] : cases) {
    INFO(text);
    const auto duration = parse_duration(text);
    REQUIRE(duration.ok());
    CHECK(*duration == seconds);
  }
}

TEST_CASE("run: duration is refused with an example when it is none", "[run][unit]") {
  for (const char* text :
       {"",    " ",   "h",      "8x",  "8 weeks", "-8h",  "+8h", "0",     "0h", "8h8h", "30m1h",     "1h30",
        "nan", "inf", "1e999h", "8h,", "eight",   "0x10", "1e",  "9999d", "8H", "1:30", "8h garbage"}) {
    INFO("'" << text << "'");
    const auto duration = parse_duration(text);
    REQUIRE_FALSE(duration.ok());
    CHECK(duration.error().kind == ErrorKind::usage);
    CHECK_THAT(duration.error().message, Catch::Contains("not a duration"));
    CHECK_THAT(duration.error().hint, Catch::Contains("8h"));
  }
}

TEST_CASE("run: duration text reads back the same double", "[run][property]") {
  for (const double seconds : {28800.0, 5400.0, 45.0, 0.1, 1.0 / 3.0, 3600.1, 1e-9, 172800.0, 61.0, 315360000.0}) {
    INFO(run::duration_text(seconds));
    CHECK(*parse_duration(run::duration_text(seconds)) == seconds);
  }
  CHECK(run::duration_text(28800) == "8h");
  CHECK(run::duration_text(5400) == "90m");
  CHECK(run::duration_text(61) == "61s");
}

TEST_CASE("run: number text is what TOML reads as the same number", "[run][unit]") {
  CHECK(run::number_text(0.02) == "0.02");
  CHECK(run::number_text(101) == "101");
  CHECK(run::number_text(-0.0) == "-0.0");
  CHECK(run::number_text(9007199254740993.0) == "9007199254740992.0");
  CHECK(run::number_text(-std::numeric_limits<double>::infinity()) == "-inf");
}

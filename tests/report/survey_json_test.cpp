#include <formsieve/report.hpp>

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <limits>
#include <string>

using namespace formsieve;
using nlohmann::ordered_json;

namespace {

survey::Survey small_survey() {
  survey::ColumnProfile area;
  area.facts.name = "floor_area";
  area.facts.n = 411;
  area.facts.min = 12.5;
  area.facts.max = 9000.0;
  area.facts.skewness = 2.25;
  area.facts.n_distinct = 400;
  area.facts.lower_bound = 0.0;
  area.n_missing = 9;
  area.median = 300.0;
  area.medcouple = std::numeric_limits<double>::quiet_NaN();
  area.skew = forms::SkewClass::severe;
  area.direction = "right";
  forms::Form ln;
  ln.kind = forms::Kind::ln;
  area.forms = {{ln, "ln(floor_area)", true, "", "", 0.125, true, "right-skewed"},
                {forms::Form{}, "floor_area", true, "", "", 2.25, true, ""}};
  survey::ColumnProfile cooling;
  cooling.facts.name = "cooling";
  cooling.facts.text = true;
  cooling.facts.levels = {"brine", "air"};
  cooling.facts.level_counts = {300, 111};
  cooling.set_aside = true;
  cooling.notes = {"a reason"};
  return {"coldstores.csv", "ab12", 420, 5, {area, cooling}};
}

}  // namespace

TEST_CASE("report: survey JSON holds the profile of every column", "[report][unit]") {
  const auto json = ordered_json::parse(report::survey_json(small_survey()));
  CHECK(json.at("formsieve") == version());
  CHECK(json.at("data").at("rows_read") == 420);
  CHECK(json.at("rare_levels") == 5);
  const auto& area = json.at("columns").at(0);
  CHECK(area.at("column") == "floor_area");
  CHECK(area.at("type") == "number");
  CHECK(area.at("missing") == 9);
  CHECK(area.at("min") == 12.5);
  CHECK(area.at("median") == 300.0);
  CHECK(area.at("medcouple").is_null());
  CHECK(area.at("skew_class") == "severe");
  CHECK(area.at("lower_bound") == 0.0);
  CHECK(area.at("upper_bound").is_null());
  CHECK(area.at("forms").at(0).at("label") == "ln(floor_area)");
  CHECK(area.at("forms").at(0).at("form") == "ln");
  CHECK(area.at("forms").at(0).at("skewness_after") == 0.125);
  CHECK(area.at("forms").at(0).at("why") == "right-skewed");
  CHECK(area.at("forms").at(1).at("why").is_null());
}

TEST_CASE("report: survey JSON gives text columns their levels instead of moments", "[report][unit]") {
  const auto cooling = ordered_json::parse(report::survey_json(small_survey())).at("columns").at(1);
  CHECK(cooling.at("type") == "text");
  CHECK(cooling.at("levels") ==
        ordered_json::array({{{"level", "brine"}, {"rows", 300}}, {{"level", "air"}, {"rows", 111}}}));
  CHECK_FALSE(cooling.contains("mean"));
  CHECK(cooling.at("set_aside") == true);
  CHECK(cooling.at("notes").at(0) == "a reason");
}

TEST_CASE("report: survey JSON is the same text for the same survey and ends with a newline", "[report][unit]") {
  const std::string text = report::survey_json(small_survey());
  CHECK(text == report::survey_json(small_survey()));
  CHECK(text.ends_with("}\n"));
}

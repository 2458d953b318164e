#include <formsieve/survey.hpp>

#include <algorithm>
#include <catch2/catch.hpp>
#include <string>
#include <vector>

#include "tables.hpp"

namespace formsieve::survey {
namespace {

using testing::has_note;
using testing::kMissing;
using testing::numbers;
using testing::table_of;
using testing::texts;

/// "a" n times, then "b" …
std::vector<std::string> repeated(const std::vector<std::pair<std::string, int>>& levels) {
  std::vector<std::string> out;
  for (const auto& [level, n] : levels) out.insert(out.end(), static_cast<std::size_t>(n), level);
  return out;
}

Result<Survey> survey_of(std::vector<table::Column> columns, const std::string& response = "") {
  Options options;
  options.response = response;
  return profile(table_of(std::move(columns)), options);
}

TEST_CASE("survey: a survey names the table and lists its columns in order", "[survey][unit]") {
  Options options;
  options.ignore = {"b"};
  options.rare_level_count = 3;
  const auto found =
      profile(table_of({numbers("c", {1, 2, 4}), numbers("b", {1, 1, 2}), texts("a", {"u", "u", "v"})}), options);
  REQUIRE(found);
  CHECK(found->file == "stores.csv");
  CHECK(found->sha256 == "ab12");
  CHECK(found->n_rows == 3);
  CHECK(found->rare_level_count == 3);
  REQUIRE(found->columns.size() == 2);
  CHECK(found->columns[0].facts.name == "c");
  CHECK(found->columns[1].facts.name == "a");
}

TEST_CASE("survey: levels of text come most frequent first, ties by first appearance", "[survey][unit]") {
  auto values = repeated({{"gas", 6}, {"oil", 9}, {"wood", 6}, {"", 2}});
  const auto found = survey_of({texts("fuel", values)});
  const ColumnProfile& fuel = found->columns.at(0);
  CHECK(fuel.facts.text);
  CHECK(fuel.facts.levels == std::vector<std::string>{"oil", "gas", "wood"});
  CHECK(fuel.facts.level_counts == std::vector<std::size_t>{9, 6, 6});
  CHECK(fuel.facts.n == 21);
  CHECK(fuel.facts.n_distinct == 3);
  CHECK(fuel.n_missing == 2);
  REQUIRE(fuel.forms.size() == 1);
  CHECK(fuel.forms[0].suggested);
  CHECK(fuel.forms[0].form.levels.front() == "oil");
  CHECK_FALSE(has_note(fuel, "pooled"));
}

TEST_CASE("survey: levels that the rows do not hold are left out", "[survey][unit]") {
  table::Column column = texts("fuel", repeated({{"gas", 6}, {"oil", 7}}));
  column.levels.push_back("coal");
  const auto found = survey_of({column});
  CHECK(found->columns.at(0).facts.levels == std::vector<std::string>{"oil", "gas"});
}

TEST_CASE("survey: rare levels are pooled and named", "[survey][unit]") {
  const auto found = survey_of({texts("fuel", repeated({{"gas", 6}, {"coal", 4}, {"oil", 9}, {"peat", 1}}))});
  const ColumnProfile& fuel = found->columns.at(0);
  CHECK_FALSE(fuel.set_aside);
  CHECK(has_note(fuel, "2 levels seen on fewer than 5 rows are pooled into one: 'coal' and 'peat'"));
  CHECK(fuel.forms.at(0).form.pooled == std::vector<std::string>{"coal", "peat"});
  const auto alone = survey_of({texts("fuel", repeated({{"gas", 6}, {"oil", 9}, {"peat", 1}}))});
  CHECK_FALSE(has_note(alone->columns.at(0), "pooled"));
  CHECK(alone->columns.at(0).forms.at(0).form.pooled.empty());
}

TEST_CASE("survey: text that names rows, has one level, or rare levels alone is set aside", "[survey][unit]") {
  std::vector<std::string> ids;
  for (int i = 0; i < 20; ++i) ids.push_back(std::to_string(i / 2 * 2 + (i < 4 ? i % 2 : 0)));  // 12 levels
  const auto named = survey_of({texts("site", ids)});
  CHECK(named->columns.at(0).set_aside);
  CHECK(named->columns.at(0).notes.at(0).find("12 levels on 20 rows, more than one for every two") !=
        std::string::npos);
  const auto one = survey_of({texts("site", repeated({{"a", 9}, {"", 1}}))});
  CHECK(one->columns.at(0).set_aside);
  CHECK(one->columns.at(0).notes.at(0) == "it holds one level only");
  const auto rare = survey_of({texts("site", repeated({{"a", 4}, {"b", 4}, {"c", 3}}))});
  CHECK(rare->columns.at(0).set_aside);
  CHECK(rare->columns.at(0).notes.at(0).find("every one of its 3 levels is rare") != std::string::npos);
  const auto empty = survey_of({texts("site", {"", "", ""})});
  CHECK(empty->columns.at(0).set_aside);
}

TEST_CASE("survey: half as many levels as rows is not yet too many", "[survey][unit]") {
  auto values = repeated({{"a", 5}, {"b", 1}, {"c", 1}, {"d", 1}});  // 4 levels on 8 rows
  CHECK_FALSE(survey_of({texts("site", values)})->columns.at(0).set_aside);
  values.push_back("e");  // 5 on 9
  CHECK(survey_of({texts("site", values)})->columns.at(0).set_aside);
}

TEST_CASE("survey: a column that repeats an earlier one is set aside and the twin named", "[survey][unit]") {
  const std::vector<double> area = {3, 1, 4, kMissing, 5, 0.0};
  std::vector<double> copy = area;
  copy[5] = -0.0;
  std::vector<double> nearly = area;
  nearly[4] = 5.000001;
  const auto found = survey_of({numbers("area", area), numbers("floor", copy), numbers("nearly", nearly)});
  CHECK_FALSE(found->columns.at(0).set_aside);
  CHECK(found->columns.at(1).set_aside);
  CHECK(found->columns.at(1).notes.at(0).find("'area'") != std::string::npos);
  CHECK_FALSE(found->columns.at(2).set_aside);
}

TEST_CASE("survey: text columns are twins when their levels go one to one", "[survey][unit]") {
  const auto site = repeated({{"north", 5}, {"south", 6}, {"", 1}});
  const auto code = repeated({{"N", 5}, {"S", 6}, {"", 1}});
  const auto other = repeated({{"N", 6}, {"S", 5}, {"", 1}});
  const auto found = survey_of({texts("site", site), texts("code", code), texts("other", other)});
  CHECK(found->columns.at(1).set_aside);
  CHECK(found->columns.at(1).notes.at(0).find("one to one with those of 'site'") != std::string::npos);
  CHECK_FALSE(found->columns.at(2).set_aside);
}

TEST_CASE("survey: a copy of the response is set aside wherever it stands", "[survey][unit]") {
  const std::vector<double> y = {3, 1, 4, 1, 5};
  const auto found = survey_of({numbers("copy", y), numbers("y", y)}, "y");
  CHECK(found->columns.at(0).set_aside);
  CHECK(found->columns.at(0).notes.at(0).find("repeats the response 'y'") != std::string::npos);
  CHECK_FALSE(found->columns.at(1).set_aside);
}

TEST_CASE("survey: an ignored column is nobody's twin", "[survey][unit]") {
  Options options;
  options.ignore = {"a"};
  const auto found = profile(table_of({numbers("a", {1, 2, 4}), numbers("b", {1, 2, 4})}), options);
  CHECK_FALSE(found->columns.at(0).set_aside);
}

TEST_CASE("survey: unusable columns are those that a profile sets aside", "[survey][property]") {
  std::vector<std::string> ids;
  for (int i = 0; i < 12; ++i) ids.push_back(std::to_string(i));
  std::vector<double> rising;
  for (int i = 0; i < 12; ++i) rising.push_back(i * i);
  const table::Table table = table_of(
      {numbers("good", rising), numbers("twin", rising), texts("id", ids),
       numbers("constant", std::vector<double>(12, 1.0)), numbers("empty", std::vector<double>(12, kMissing)),
       numbers("constant twin", std::vector<double>(12, 1.0)), texts("fuel", repeated({{"gas", 6}, {"oil", 6}}))});
  const auto reasons = unusable_columns(table, {});
  const auto found = profile(table, {});
  REQUIRE(found);
  std::size_t n_aside = 0;
  for (const ColumnProfile& column : found->columns) {
    INFO(column.facts.name);
    CHECK(column.set_aside == reasons.contains(column.facts.name));
    if (!column.set_aside) continue;
    CHECK(column.notes.at(0) == reasons.at(column.facts.name));
    ++n_aside;
  }
  CHECK(n_aside == 5);
}

TEST_CASE("survey: a column that counts the rows is pointed out", "[survey][unit]") {
  std::vector<double> row;
  std::vector<double> other;
  for (int i = 0; i < 12; ++i) {
    row.push_back(100 + i);
    other.push_back(i == 7 ? 50 : i);
  }
  const auto found = survey_of({numbers("row", row), numbers("other", other)});
  CHECK(has_note(found->columns.at(0), "row number"));
  CHECK_FALSE(has_note(found->columns.at(1), "row number"));
}

TEST_CASE("survey: a bound that the data break is an error at the earliest row", "[survey][unit]") {
  Options options;
  options.bounds = {{"fill", {0.0, 100.0}}};
  const auto found = profile(table_of({numbers("fill", {50, 100, 104.5, -3})}), options);
  REQUIRE_FALSE(found);
  CHECK(found.error().kind == ErrorKind::data);
  CHECK(found.error().message == "the value 104.5 of 'fill' is above its declared upper bound 100");
  CHECK(found.error().where == "stores.csv, line 4, column 'fill'");
  CHECK(found.error().hint.find("fill = [0, 104.5]") != std::string::npos);
  options.bounds = {{"fill", {-3.0, 104.5}}};
  CHECK(profile(table_of({numbers("fill", {50, 100, 104.5, -3})}), options));
  options.bounds = {{"fill", {0.0, INFINITY}}};
  const auto below = profile(table_of({numbers("fill", {50, kMissing, 104.5, -3})}), options);
  REQUIRE_FALSE(below);
  CHECK(below.error().message == "the value -3 of 'fill' is below its declared lower bound 0");
}

TEST_CASE("survey: bounds the wrong way round or on text are errors", "[survey][unit]") {
  Options options;
  options.bounds = {{"x", {5.0, 1.0}}};
  CHECK(profile(table_of({numbers("x", {2, 3})}), options).error().kind == ErrorKind::data);
  CHECK(profile(table_of({texts("x", {"a", "b"})}), options).error().message.find("text") != std::string::npos);
}

TEST_CASE("survey: an unknown column in the options is an error that names the nearest", "[survey][unit]") {
  const table::Table table = table_of({numbers("floor_area", {1, 2, 4}), numbers("energy", {1, 2, 5})});
  Options response;
  response.response = "enregy";
  Options ignore;
  ignore.ignore = {"flor_area"};
  Options bounds;
  bounds.bounds = {{"humidity", {0.0, 1.0}}};
  CHECK(profile(table, response).error().hint == "did you mean 'energy'?");
  CHECK(profile(table, ignore).error().hint == "did you mean 'floor_area'?");
  CHECK(profile(table, ignore).error().kind == ErrorKind::data);
  CHECK(profile(table, bounds).error().hint == "its columns are 'floor_area' and 'energy'");
}

}  // namespace
}  // namespace formsieve::survey

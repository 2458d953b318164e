#include <algorithm>
#include <catch2/catch.hpp>
#include <random>
#include <sstream>
#include <toml++/toml.h>

#include "pipeline/plan_text.hpp"
#include "pipeline/prepare.hpp"
#include "support.hpp"

namespace formsieve {
namespace {

using test::plan_for;
using test::read_text;
using test::TemporaryFolder;

const std::string kDemoTable = std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv";

std::vector<std::string> lines_of(const std::string& text) {
  std::vector<std::string> lines;
  std::istringstream stream(text);
  for (std::string line; std::getline(stream, line);) lines.push_back(line);
  return lines;
}

std::size_t characters(const std::string& line) {
  return static_cast<std::size_t>(
      std::count_if(line.begin(), line.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xc0U) != 0x80U; }));
}

std::string drafted(const run::Plan& plan) {
  const auto text = pipeline::draft(plan);
  INFO((text ? std::string() : text.error().message + " | " + text.error().where));
  REQUIRE(text);
  return *text;
}

run::Plan parsed(const std::string& text) {
  const auto plan = run::parse_plan(text, "drafted.toml");
  INFO((plan ? std::string() : plan.error().message + " | " + plan.error().where));
  REQUIRE(plan);
  return *plan;
}

bool holds(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }

/// A table of `n` rows with a skewed positive, a count with zeros and a response, under the given names.
std::string small_table(const std::string& positive, const std::string& count, const std::string& response,
                        int n = 60) {
  std::mt19937_64 engine(5);
  std::lognormal_distribution<double> area(3.0, 0.9);
  std::poisson_distribution<int> openings(2.0);
  std::ostringstream out;
  out << positive << ',' << count << ',' << response << '\n';
  for (int i = 0; i < n; ++i) {
    const double x = std::round(area(engine) * 100.0) / 100.0;
    const int k = openings(engine);
    out << x << ',' << k << ',' << 5.0 * x + k + 0.01 * i << '\n';
  }
  return out.str();
}

TEST_CASE("pipeline: a draft of the demo table is a plan of short lines", "[pipeline][unit]") {
  const std::string text = drafted(plan_for(kDemoTable, "energy_kwh"));
  CHECK_NOTHROW(toml::parse(text));
  for (const std::string& line : lines_of(text)) {
    INFO(line);
    CHECK((characters(line) <= pipeline::kPlanWidth || line.starts_with("file = ")));
    CHECK_FALSE(line.ends_with(' '));
  }
  const run::Plan plan = parsed(text);
  CHECK(plan.data.response == "energy_kwh");
  CHECK(plan.data.ignore == std::vector<std::string>{"store"});
  CHECK(holds(text, "nearly as many levels as rows"));
  CHECK(plan.forms.of.size() == 10);
  CHECK(plan.forms.of.contains("fill_percent"));
  CHECK(holds(text, "√(101 − fill_percent)"));
  CHECK(holds(text, "ln(door_openings) is struck"));
  CHECK(holds(text, "bounds = { fill_percent = [0, 100] }"));
}

TEST_CASE("pipeline: a drafted plan searches what a search without a plan searches", "[pipeline][property]") {
  const run::Plan bare = plan_for(kDemoTable, "energy_kwh");
  run::Plan plan = parsed(drafted(bare));
  plan.path.clear();
  const auto by_default = pipeline::prepare(*pipeline::load_table(bare), bare);
  const auto by_draft = pipeline::prepare(*pipeline::load_table(plan), plan);
  REQUIRE(by_default);
  REQUIRE(by_draft);
  CHECK(by_draft->table.n_rows == by_default->table.n_rows);
  CHECK(by_draft->data.response_forms == by_default->data.response_forms);
  REQUIRE(by_draft->menus.size() == by_default->menus.size());
  for (std::size_t j = 0; j < by_draft->menus.size(); ++j) {
    INFO(by_default->menus[j].column);
    CHECK(by_draft->menus[j].column == by_default->menus[j].column);
    CHECK(by_draft->menus[j].forms == by_default->menus[j].forms);
  }
}

TEST_CASE("pipeline: a drafted plan states the default settings", "[pipeline][unit]") {
  const run::Plan plan = parsed(drafted(plan_for(kDemoTable, "energy_kwh")));
  const run::Plan defaults;
  CHECK(plan.search.strategy == defaults.search.strategy);
  CHECK(plan.search.within == defaults.search.within);
  CHECK(plan.search.folds == defaults.search.folds);
  CHECK(plan.search.repeats == defaults.search.repeats);
  CHECK(plan.search.seed == defaults.search.seed);
  CHECK(plan.search.pool == defaults.search.pool);
  CHECK(plan.search.budget_seconds == defaults.search.budget_seconds);
  CHECK(plan.rank.by == defaults.rank.by);
  CHECK(plan.rank.shortlist == defaults.rank.shortlist);
  CHECK(plan.rank.near_tie == defaults.rank.near_tie);
  CHECK(plan.rank.require.empty());
  CHECK(plan.data.rare_levels == defaults.data.rare_levels);
  CHECK_FALSE(plan.data.weight);
}

TEST_CASE("pipeline: every setting that a draft leaves off can be switched on", "[pipeline][property]") {
  const std::string text = drafted(plan_for(kDemoTable, "energy_kwh"));
  const std::vector<std::string> lines = lines_of(text);
  std::vector<std::string> switched;
  for (std::size_t at = 0; at < lines.size(); ++at) {
    const std::size_t equals = lines[at].find(" = ");
    const bool off = lines[at].starts_with("# ") && equals != std::string::npos && lines[at][2] >= 'a' &&
                     lines[at].substr(2, equals - 2).find(' ') == std::string::npos;
    if (!off) continue;
    std::string edited;
    for (std::size_t i = 0; i < lines.size(); ++i) edited += (i == at ? lines[i].substr(2) : lines[i]) + "\n";
    INFO(lines[at]);
    CHECK(run::parse_plan(edited, "edited.toml").ok());
    switched.push_back(lines[at].substr(2, equals - 2));
  }
  for (const char* key : {"query", "weight", "group", "order", "fold", "bounds", "separator", "decimal", "missing",
                          "text", "always", "direction", "max_terms", "require"}) {
    INFO(key);
    CHECK(std::find(switched.begin(), switched.end(), key) != switched.end());
  }
}

TEST_CASE("pipeline: a draft quotes names that TOML would not take bare", "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string awkward = "floor area, \"net\" # m²";
  const std::string file =
      folder.write("awkward.csv", small_table("\"floor area, \"\"net\"\" # m²\"", "\"door\nopenings\\day\"", "y.z"));
  const std::string text = drafted(plan_for(file, "y.z"));
  const run::Plan plan = parsed(text);
  CHECK(plan.data.response == "y.z");
  REQUIRE(plan.forms.of.size() == 2);
  CHECK(plan.forms.of.contains(awkward));
  CHECK(plan.forms.of.contains("door\nopenings\\day"));
  CHECK(pipeline::prepare(*pipeline::load_table(plan), plan).ok());
}

TEST_CASE("pipeline: a draft keeps the settings that it is given", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::ostringstream table;
  table << "area;site;hours;y\n";
  for (int i = 1; i <= 40; ++i)
    table << i * i << ",5;" << (i % 4) << ";" << 1 + i % 3 << ";" << 3 * i * i + i % 5 << "\n";
  run::Plan plan = plan_for(folder.write("given.csv", table.str()), "y");
  plan.data.weight = "hours";
  plan.data.group = "site";
  plan.data.separator = "semicolon";
  plan.data.decimal = "comma";
  plan.data.text = {"site"};
  plan.data.missing = std::vector<std::string>{"", "-99"};
  plan.data.bounds = {{"area", {0.0, INFINITY}}};
  plan.data.rare_levels = 3;
  plan.forms.always = {"area"};
  plan.forms.direction = {{"area", "rising"}};
  plan.search.seed = 18446744073709551615U;
  plan.search.folds = 4;
  plan.search.max_terms = 1;
  plan.search.budget_seconds = 90.0;
  plan.rank.by = "bic";
  plan.rank.require = {"equal-spread"};
  const run::Plan found = parsed(drafted(plan));
  CHECK(found.data.weight == plan.data.weight);
  CHECK(found.data.group == plan.data.group);
  CHECK(found.data.separator == plan.data.separator);
  CHECK(found.data.decimal == plan.data.decimal);
  CHECK(found.data.text == plan.data.text);
  CHECK(found.data.missing == plan.data.missing);
  CHECK(found.data.bounds == plan.data.bounds);
  CHECK(found.data.rare_levels == 3);
  CHECK(found.forms.always == plan.forms.always);
  CHECK(found.forms.direction == plan.forms.direction);
  CHECK(found.forms.of.size() == 1);  // weight and group are no predictors
  CHECK(found.search.seed == plan.search.seed);
  CHECK(found.search.folds == 4);
  CHECK(found.search.max_terms == 1U);
  CHECK(found.search.budget_seconds == 90.0);
  CHECK(found.rank.by == "bic");
  CHECK(found.rank.require == plan.rank.require);
}

TEST_CASE("pipeline: a draft ignores columns that cannot serve and says why", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::ostringstream table;
  table << "area,copy,fixed,id,gap,y\n";
  for (int i = 1; i <= 40; ++i)
    table << i * i << ',' << i * i << ",7,s" << i << ','
          << (i == 40  ? "2"
              : i == 1 ? ""
                       : "1")
          << ',' << (i == 40 ? "" : std::to_string(2 * i * i + i % 7)) << '\n';
  const std::string text = drafted(plan_for(folder.write("aside.csv", table.str()), "y"));
  const run::Plan plan = parsed(text);
  // gap varies in the table, but not on the rows that have a response.
  CHECK(plan.data.ignore == std::vector<std::string>{"copy", "fixed", "gap", "id"});
  CHECK(holds(text, "same value as 'area'"));
  CHECK(holds(text, "one value only, 7"));
  CHECK(holds(text, "2 rows are left out because a value is missing: gap on 1, y on 1"));
  CHECK(pipeline::prepare(*pipeline::load_table(plan), plan).ok());
}

TEST_CASE("pipeline: a draft offers a limit of terms when the whole space is too large", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::mt19937_64 engine(6);
  std::lognormal_distribution<double> draw(0.0, 1.0);
  std::ostringstream table;
  for (int j = 0; j < 40; ++j) table << 'x' << j << ',';
  table << "y\n";
  for (int i = 0; i < 80; ++i) {
    for (int j = 0; j < 40; ++j) table << draw(engine) << ',';
    table << draw(engine) << '\n';
  }
  std::string text = drafted(plan_for(folder.write("wide.csv", table.str()), "y"));
  CHECK_FALSE(parsed(text).search.max_terms);
  const std::size_t offered = text.find("# max_terms");
  REQUIRE(offered != std::string::npos);
  text.erase(offered, 2);
  const run::Plan plan = parsed(text);
  REQUIRE(plan.search.max_terms);
  const auto prepared = pipeline::prepare(*pipeline::load_table(plan), plan);
  REQUIRE(prepared);
  CHECK(search::count(prepared->space) <= 1'000'000'000);
  search::Space larger = prepared->space;
  larger.max_terms = *plan.search.max_terms + 1;
  CHECK(search::count(larger) > 1'000'000'000);
}

TEST_CASE("pipeline: a drafted plan runs as it is", "[pipeline][unit]") {
  const TemporaryFolder folder;
  (void)folder.write("stores.csv", small_table("area", "openings", "energy"));
  run::Plan bare = plan_for("stores.csv", "energy");
  bare.path = folder.file("drafted.toml");
  const std::string path = folder.write("drafted.toml", drafted(bare));
  const auto plan = run::read_plan(path);
  REQUIRE(plan);
  const auto json = test::search_json(*plan, folder);
  CHECK_FALSE(json.at("shortlist").empty());
}

TEST_CASE("pipeline: a draft of a table that cannot be searched is refused as the search would be",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  const auto unknown = pipeline::draft(plan_for(kDemoTable, "energy_kw"));
  REQUIRE_FALSE(unknown);
  CHECK(holds(unknown.error().hint, "energy_kwh"));
  const auto text = pipeline::draft(plan_for(kDemoTable, "cooling"));
  REQUIRE_FALSE(text);
  CHECK(text.error().kind == ErrorKind::data);
  CHECK(holds(text.error().message, "text"));
  const auto absent = pipeline::draft(plan_for(folder.file("absent.csv"), "y"));
  REQUIRE_FALSE(absent);
  CHECK(absent.error().kind == ErrorKind::io);
  const auto lone = pipeline::draft(plan_for(folder.write("lone.csv", "y\n1\n2\n3\n4\n"), "y"));
  REQUIRE_FALSE(lone);
  CHECK(lone.error().kind == ErrorKind::data);
}

}  // namespace
}  // namespace formsieve

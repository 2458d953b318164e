#include "support.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <fstream>
#include <stop_token>

namespace formsieve::test {

namespace {

using nlohmann::json;

const std::string kOpen = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open";
const std::string kDemo = std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv";

/// Coefficient of the candidate's term with this label.
double coefficient(const json& candidate, const std::string& term) {
  for (const auto& entry : candidate.at("coefficients"))
    if (entry.at("term") == term) return entry.at("value");
  FAIL("no term " << term << " in " << candidate.at("equation"));
  return 0.0;
}

const json* with_forms(const json& shortlist, const std::string& response,
                       const std::map<std::string, std::string>& terms) {
  for (const auto& candidate : shortlist.at("shortlist")) {
    if (candidate.at("response").at("form") != response || candidate.at("terms").size() != terms.size()) continue;
    bool same = true;
    for (const auto& term : candidate.at("terms")) {
      const auto wanted = terms.find(term.at("column"));
      same = same && wanted != terms.end() && term.at("form") == wanted->second;
    }
    if (same) return &candidate;
  }
  return nullptr;
}

std::string shortlist_text(const run::Plan& plan, unsigned threads) {
  const TemporaryFolder folder;
  (void)search_json(plan, folder, threads);
  return read_text(folder.file("out.run") + "/shortlist.json");
}

}  // namespace

// Ryan, Joiner & Ryan 1976; Atkinson 1985: ln volume on ln girth and ln height has slopes 1.98265 and 1.11712, R²
// 0.97768.
TEST_CASE("pipeline: cherry trees are found to grow as girth squared times height", "[pipeline][reference]") {
  const TemporaryFolder folder;
  const json shortlist = search_json(plan_for(kOpen + "/trees.csv", "volume"), folder);
  const json* found = with_forms(shortlist, "ln", {{"girth", "ln"}, {"height", "ln"}});
  REQUIRE(found != nullptr);
  CHECK(coefficient(*found, "ln(girth)") == Approx(1.98265).epsilon(1e-5));
  CHECK(coefficient(*found, "ln(height)") == Approx(1.11712).epsilon(1e-5));
  CHECK(found->at("r_squared").at("form_scale").get<double>() == Approx(0.97768).epsilon(1e-5));
  const json& best = shortlist.at("shortlist")[0];
  CHECK(found->at("cv").at("rmse").get<double>() <=
        best.at("cv").at("rmse").get<double>() + best.at("cv").at("rmse_se").get<double>());
}

// Weisberg 1985: ln brain on ln body, 2.13479 + 0.75169, R² 0.92078.
TEST_CASE("pipeline: brain weight of mammals comes out as a power of body weight", "[pipeline][reference]") {
  const TemporaryFolder folder;
  const json shortlist = search_json(plan_for(kOpen + "/mammals.csv", "brain"), folder);
  const json* found = with_forms(shortlist, "ln", {{"body", "ln"}});
  REQUIRE(found != nullptr);
  CHECK(coefficient(*found, "intercept") == Approx(2.13479).epsilon(1e-5));
  CHECK(coefficient(*found, "ln(body)") == Approx(0.75169).epsilon(1e-5));
}

TEST_CASE("pipeline: the shortlist is byte-identical for 1, 2 and 4 threads", "[pipeline][property][parallel]") {
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.data.ignore = {"visit_day", "paint_batch", "volume_m3", "outdoor_c"};
  plan.search.pool = 60;
  const std::string one = shortlist_text(plan, 1);
  CHECK(one.size() > 1000);
  CHECK(shortlist_text(plan, 2) == one);
  CHECK(shortlist_text(plan, 4) == one);
}

TEST_CASE("pipeline: the shortlist is byte-identical on every instruction set", "[pipeline][property]") {
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.search.pool = 100;
  plan.search.max_terms = 5;
  const std::string best = shortlist_text(plan, 1);
  std::size_t n_run = 0;
  for (const char* name : {"baseline", "avx2", "avx512"}) {
    if (!base::force_instruction_set(name)) continue;
    ++n_run;
    INFO(name);
    CHECK(shortlist_text(plan, 1) == best);
  }
  CHECK(base::force_instruction_set("best"));
  CHECK(n_run > 0);
}

TEST_CASE("pipeline: the demo's noise columns stay out of the recommended candidate and its truth is near the top",
          "[pipeline][slow]") {
  const TemporaryFolder folder;
  const json shortlist = search_json(plan_for(kDemo, "energy_kwh"), folder);
  const json& candidates = shortlist.at("shortlist");
  const auto marked = [&](const std::string& mark) -> const json& {
    for (const auto& candidate : candidates)
      for (const auto& own : candidate.at("marks"))
        if (own == mark) return candidate;
    FAIL("no candidate is marked " << mark);
    return candidates[0];
  };
  const json& recommended = marked("recommended");
  CHECK(recommended.at("response").at("form") == "ln");
  bool area = false;
  for (const auto& term : recommended.at("terms"))
    area = area || (term.at("column") == "floor_area_m2" && term.at("form") == "ln");
  CHECK(area);
}

TEST_CASE("pipeline: search stopped from outside leaves a usable shortlist of what was scored", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.search.pool = 100;
  std::stop_source source;
  pipeline::SearchOptions options;
  options.out = folder.file("stopped.run");
  options.progress = [&](const Progress& news) {
    if (news.phase == "screening") source.request_stop();
  };
  const auto outcome = pipeline::search(plan, options, source.get_token());
  if (!outcome) FAIL(outcome.error().message);
  const json shortlist = json::parse(read_text(folder.file("stopped.run") + "/shortlist.json"));
  CHECK(outcome->stopped_early);
  CHECK_FALSE(shortlist.at("space").at("complete").get<bool>());
  CHECK(std::stod(shortlist.at("space").at("scored").get<std::string>()) <
        std::stod(shortlist.at("space").at("candidates").get<std::string>()));
  CHECK(shortlist.at("shortlist").size() > 0);
}

TEST_CASE("pipeline: a search stopped before anything was scored says so", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::stop_source source;
  source.request_stop();
  pipeline::SearchOptions options;
  options.out = folder.file("trees.run");
  const auto outcome = pipeline::search(plan_for(kOpen + "/trees.csv", "volume"), options, source.get_token());
  REQUIRE_FALSE(outcome.ok());
  CHECK_THAT(outcome.error().message, Catch::Contains("stopped before it had examined any candidate"));
}

TEST_CASE("pipeline: a space beyond the budget is refused with what to change when every candidate is asked for",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.search.strategy = "every";
  plan.search.budget_seconds = 0.001;
  pipeline::SearchOptions options;
  options.out = folder.file("refused.run");
  const auto outcome = pipeline::search(plan, options);
  REQUIRE_FALSE(outcome.ok());
  CHECK(outcome.error().kind == ErrorKind::plan);
  CHECK_THAT(outcome.error().message, Catch::Contains("candidates"));
  CHECK_THAT(outcome.error().hint, Catch::Contains("search.budget"));
}

TEST_CASE("pipeline: an existing run is not overwritten without being asked", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  pipeline::SearchOptions options;
  options.out = folder.file("trees.run");
  REQUIRE(pipeline::search(plan, options).ok());
  const std::string before = read_text(folder.file("trees.run") + "/shortlist.json");
  const auto again = pipeline::search(plan, options);
  REQUIRE_FALSE(again.ok());
  CHECK(again.error().kind == ErrorKind::usage);
  CHECK_THAT(again.error().hint, Catch::Contains("--replace"));
  CHECK(read_text(folder.file("trees.run") + "/shortlist.json") == before);
  options.replace = true;
  CHECK(pipeline::search(plan, options).ok());
}

TEST_CASE("pipeline: the plan in a run folder runs again from any place", "[pipeline][unit]") {
  const TemporaryFolder folder;
  folder.write("trees.csv", read_text(kOpen + "/trees.csv"));
  const std::string plan_file = folder.write("trees.toml", "[data]\nfile = \"trees.csv\"\nresponse = \"volume\"\n");
  const auto plan = run::read_plan(plan_file);
  REQUIRE(plan.ok());
  pipeline::SearchOptions options;
  options.out = folder.file("first.run");
  REQUIRE(pipeline::search(*plan, options).ok());
  const auto resolved = run::read_plan(folder.file("first.run") + "/plan.toml");
  REQUIRE(resolved.ok());
  CHECK(resolved->data.file == "../trees.csv");
  options.out = folder.file("second.run");
  REQUIRE(pipeline::search(*resolved, options).ok());
  const auto shortlist = [&](const std::string& run) {
    return nlohmann::json::parse(read_text(folder.file(run) + "/shortlist.json")).at("shortlist");
  };
  CHECK(shortlist("first.run") == shortlist("second.run"));
}

TEST_CASE("pipeline: replacing a run leaves the old one alone when the new plan is wrong", "[pipeline][unit]") {
  const TemporaryFolder folder;
  pipeline::SearchOptions options;
  options.out = folder.file("trees.run");
  options.replace = true;
  REQUIRE(pipeline::search(plan_for(kOpen + "/trees.csv", "volume"), options).ok());
  const std::string before = read_text(folder.file("trees.run") + "/shortlist.json");
  REQUIRE_FALSE(pipeline::search(plan_for(kOpen + "/trees.csv", "no such column"), options).ok());
  CHECK(read_text(folder.file("trees.run") + "/shortlist.json") == before);
}

TEST_CASE("pipeline: declared directions set contradicting candidates aside and count them", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.forms.always = {"girth"};
  plan.forms.direction = {{"girth", "rising"}};
  const json agreeing = search_json(plan, folder);
  CHECK(agreeing.at("space").at("set_aside_direction") == 0);
  plan.forms.direction = {{"girth", "falling"}};
  pipeline::SearchOptions options;
  options.out = folder.file("falling.run");
  const auto outcome = pipeline::search(plan, options);
  REQUIRE_FALSE(outcome.ok());
  CHECK_THAT(outcome.error().message, Catch::Contains("contradict"));
}

TEST_CASE("pipeline: required checks set failing candidates aside", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.rank.require = {"straightness"};
  const json shortlist = search_json(plan, folder);
  CHECK(shortlist.at("space").at("set_aside_require").get<int>() > 0);
  for (const auto& candidate : shortlist.at("shortlist"))
    for (const auto& check : candidate.at("checks"))
      if (check.at("check") == "straightness") CHECK(check.at("passes").get<bool>());
}

TEST_CASE("pipeline: rare levels are pooled alike by the default menu and by a listed one", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::string text = "y,site\n";
  for (int i = 0; i < 40; ++i)
    text += std::to_string(10 + i % 7 + (i * i) % 5) + "," +
            (i < 20   ? "north"
             : i < 36 ? "south"
             : i < 38 ? "east"
                      : "west") +
            "\n";
  run::Plan plan = plan_for(folder.write("sites.csv", text), "y");
  const json by_default = search_json(plan, folder);
  plan.forms.of["site"] = {form_entry("levels")};
  CHECK(search_json(plan, folder).at("menus") == by_default.at("menus"));
}

}  // namespace formsieve::test

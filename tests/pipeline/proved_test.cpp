// Strategies beyond the walk, against the walk.
#include "support.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>

#include <cmath>

namespace formsieve::test {

namespace {

using nlohmann::json;

const std::string kOpen = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open";
const std::string kDemo = std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv";

json searched(run::Plan plan, const std::string& strategy, const std::string& by, unsigned threads = 0) {
  plan.search.strategy = strategy;
  plan.rank.by = by;
  const TemporaryFolder folder;
  return search_json(plan, folder, threads);
}

/// A part of the demo that the walk covers in no time.
run::Plan small_demo() {
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.data.ignore = {"visit_day", "paint_batch", "volume_m3", "outdoor_c"};
  plan.search.pool = 600;
  return plan;
}

std::vector<std::string> numbers(const json& shortlist, std::size_t most) {
  std::vector<std::string> numbers;
  for (const auto& candidate : shortlist.at("shortlist"))
    if (numbers.size() < most) numbers.push_back(candidate.at("candidate"));
  return numbers;
}

/// The proof's losses beside those of the walk, which visited everything.
void compare_profiles(const json& proof, const json& walk) {
  const json& own = proof.at("proof").at("form_profile");
  const json& other = walk.at("form_profile");
  REQUIRE(own.size() == other.size());
  for (std::size_t j = 0; j < own.size(); ++j) {
    REQUIRE(own[j].at("column") == other[j].at("column"));
    REQUIRE(own[j].at("choices").size() == other[j].at("choices").size());
    for (std::size_t c = 0; c < own[j].at("choices").size(); ++c) {
      const json& proved = own[j].at("choices")[c];
      const json& scored = other[j].at("choices")[c];
      CAPTURE(own[j].at("column"), c, proved, scored);
      CHECK(proved.at("form") == scored.at("form"));
      CHECK(proved.at("proved") == true);
      CHECK(proved.at("loss").get<double>() == Approx(scored.at("criterion_loss").get<double>()).margin(1e-3));
    }
  }
}

void compare_terms(const json& proof, const json& walk) {
  for (const auto& terms : proof.at("proof").at("by_terms")) {
    for (const auto& other : walk.at("by_terms")) {
      if (other.at("terms") != terms.at("terms")) continue;
      CAPTURE(terms, other);
      CHECK(terms.at("proved") == true);
      CHECK(terms.at("loss").get<double>() == Approx(other.at("criterion_loss").get<double>()).margin(1e-3));
    }
  }
}

}  // namespace

TEST_CASE("pipeline: the proof lists what the walk lists when tables are small enough for both",
          "[pipeline][reference]") {
  const auto [file, response] = GENERATE(std::pair<std::string, std::string>{"trees.csv", "volume"},
                                         std::pair<std::string, std::string>{"mammals.csv", "brain"});
  const std::string by = GENERATE("aic", "aicc", "bic");
  CAPTURE(file, by);
  const run::Plan plan = plan_for(kOpen + "/" + file, response);
  const json walk = searched(plan, "every", by);
  const json proof = searched(plan, "proved", by);
  CHECK(proof.at("space").at("strategy") == "proved");
  CHECK(proof.at("space").at("proved") == true);
  CHECK(proof.at("proof").at("gap") == 0.0);
  const auto listed = numbers(proof, 5);
  CHECK(listed.size() >= 2);
  CHECK(listed == numbers(walk, listed.size()));
}

TEST_CASE("pipeline: the proof's costs of forms and terms are those of the walk over the whole space",
          "[pipeline][property]") {
  const json walk = searched(small_demo(), "every", "aic");
  const json proof = searched(small_demo(), "proved", "aic");
  CHECK(numbers(proof, 25) == numbers(walk, 25));
  compare_profiles(proof, walk);
  compare_terms(proof, walk);
}

TEST_CASE("pipeline: the near-best set is complete when all candidates can be counted", "[pipeline][property]") {
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.rank.shortlist = 1000;
  plan.rank.families = false;  // each candidate is a line of its own, so that they can be counted
  const json walk = searched(plan, "every", "aic");
  REQUIRE(walk.at("space").at("examined").get<std::size_t>() ==
          std::stoul(walk.at("space").at("scored").get<std::string>()));
  const json proof = searched(plan, "proved", "aic");
  const double lowest = walk.at("shortlist")[0].at("aic");
  std::size_t near = 0;
  for (const auto& candidate : walk.at("shortlist")) near += candidate.at("aic").get<double>() <= lowest + 4.0 ? 1 : 0;
  CHECK(proof.at("proof").at("near_best").at("complete") == true);
  CHECK(proof.at("proof").at("near_best").at("candidates").get<std::size_t>() == near);
}

TEST_CASE("pipeline: beyond the walk the shortlist is byte-identical for 1, 2 and 4 threads",
          "[pipeline][property][parallel]") {
  const std::string strategy = GENERATE("proved", "guided");
  CAPTURE(strategy);
  const auto text = [&](unsigned threads) { return searched(small_demo(), strategy, "cv_rmse", threads).dump(); };
  const std::string one = text(1);
  CHECK(one.size() > 1000);
  CHECK(text(2) == one);
  CHECK(text(4) == one);
}

TEST_CASE("pipeline: the guided search finds the walk's best by error in own units", "[pipeline][property]") {
  const json walk = searched(small_demo(), "every", "cv_rmse");
  const json guided = searched(small_demo(), "guided", "cv_rmse");
  CHECK(guided.at("space").at("proved") == false);
  CHECK(guided.at("shortlist")[0].at("candidate") == walk.at("shortlist")[0].at("candidate"));
}

TEST_CASE("pipeline: a space beyond the budget is searched by proof and guidance together", "[pipeline][unit]") {
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.search.budget_seconds = 3.0;
  plan.search.pool = 50;
  plan.forms.default_menu = {form_entry("identity"),      form_entry("square"),       form_entry("cube"),
                             form_entry("power", {0.25}), form_entry("power", {0.5}), form_entry("power", {4.0}),
                             form_entry("asinh")};
  plan.forms.response = {form_entry("ln"), form_entry("sqrt"), form_entry("identity")};
  const json result = searched(plan, "auto", "cv_rmse");
  CHECK(result.at("space").at("strategy") == "proved and guided");
  CHECK(result.at("space").at("strategy_why").get<std::string>().find("more than the budget of 3 s") !=
        std::string::npos);
  CHECK(result.at("shortlist").size() > 1);
  CHECK(result.contains("proof"));
}

TEST_CASE("pipeline: a proof is read back as it was written", "[pipeline][property]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.search.strategy = "proved";
  (void)search_json(plan, folder);
  const std::string run = folder.file("out.run");
  const auto shortlist = pipeline::open_run(run);
  REQUIRE(shortlist);
  CHECK_FALSE(shortlist->proof.empty());
  CHECK(report::shortlist_json(*shortlist) == read_text(run + "/shortlist.json"));
}

}  // namespace formsieve::test

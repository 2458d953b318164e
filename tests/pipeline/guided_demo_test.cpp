// The guided search beside the walk over every candidate of the demo table.
#include "support.hpp"

#include "pipeline/pilot.hpp"
#include "pipeline/prepare.hpp"
#include "search/guided.hpp"
#include "search/own_score.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <numeric>
#include <utility>

namespace formsieve::test {

namespace {

/// What leads of every list is compared.
constexpr std::size_t kLeading = 100;
/// Of the walk's lists, which are by held-out error on the form's scale, enough that they hold the leading in own units
/// of every response form but one whose two orders have little in common.
constexpr std::size_t kWalked = 20'000;

struct Demo {
  pipeline::Prepared prepared;
  base::GramSet grams;
};

Demo prepare_demo() {
  run::Plan plan = plan_for(std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv", "energy_kwh");
  plan.data.ignore = {"store"};
  auto table = table::read_csv(plan.data.file, {});
  REQUIRE(table);
  auto prepared = pipeline::prepare(std::move(*table), plan);
  REQUIRE(prepared);
  auto grams = design::build_grams(prepared->data, prepared->folds, 0);
  REQUIRE(grams);
  REQUIRE(pipeline::add_own_units(*prepared, *grams, 0));
  return {std::move(*prepared), std::move(*grams)};
}

/// The walk's list in the order of the own-units score.
std::vector<std::pair<double, search::Choice>> by_own(const Demo& demo, const std::vector<search::Scored>& walked) {
  std::vector<search::Choice> choices;
  for (const auto& scored : walked) choices.push_back(scored.choice);
  const auto scores = search::own_scores(demo.prepared.space, demo.grams, choices, 0);
  std::vector<std::pair<double, search::Choice>> ranked;
  for (std::size_t i = 0; i < choices.size(); ++i) ranked.emplace_back(scores[i].working_response, choices[i]);
  std::stable_sort(ranked.begin(), ranked.end(), [](const auto& a, const auto& b) { return a.first < b.first; });
  return ranked;
}

}  // namespace

TEST_CASE("pipeline: the guided search leads with the same candidates as the walk on the demo table",
          "[pipeline][property][slow]") {
  const Demo demo = prepare_demo();
  const search::Space& space = demo.prepared.space;
  REQUIRE(search::count(space) > 10'000'000);
  search::WalkOptions walk_options;
  walk_options.rules = {{search::Score::cv_sse, kWalked, {}}};
  const auto walked = search::walk(space, demo.grams, walk_options);
  search::GuidedOptions options;
  options.restarts = 200;
  for (std::size_t r = 0; r < space.n_responses; ++r)
    if (pipeline::is_linear(demo.prepared.data.response_forms[r])) options.own_scale.push_back(r);
  const auto found = search::guided(space, demo.grams, options);
  CHECK(found.n_scored < 500'000);
  for (std::size_t r = 0; r < space.n_responses; ++r) {
    INFO("response form " << r);
    for (std::size_t i = 0; i < kLeading; ++i)
      CHECK(found.by_cv[r].sse[i] == Approx(walked.lists[0][r][i].cv_sse).epsilon(1e-9));
    if (search::own_units_of(demo.grams, r) == nullptr) continue;
    // the walk's list may lack some of the leading, never the other way round
    const auto own = by_own(demo, walked.lists[0][r]);
    for (std::size_t i = 0; i < kLeading; ++i) CHECK(found.by_own[r].sse[i] <= own[i].first * (1.0 + 1e-9));
  }
  // of the response form that leads, the walk's list lacks none
  REQUIRE(found.best_response.has_value());
  const std::size_t best = *found.best_response;
  const auto own = by_own(demo, walked.lists[0][best]);
  for (std::size_t i = 0; i < kLeading; ++i) CHECK(found.by_own[best].candidates[i].choice == own[i].second);
}

}  // namespace formsieve::test

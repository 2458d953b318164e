// Screening in own units, from a table to the pool.
#include "support.hpp"

#include "base/sums.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/pilot.hpp"
#include "pipeline/pool.hpp"
#include "search/own_score.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <random>
#include <span>
#include <sstream>

namespace formsieve::test {

namespace {

double uniform(std::mt19937_64& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }

double normal(std::mt19937_64& random) {
  return std::sqrt(-2.0 * std::log(uniform(random))) * std::cos(6.283185307179586 * uniform(random));
}

/// Four skewed predictors, the response a product of powers of two of them with a wide multiplicative error.
std::string skewed_table(std::uint64_t seed, std::size_t n_rows, double sigma) {
  std::mt19937_64 random(seed);
  std::ostringstream text;
  text.precision(17);
  text << "y,a,b,c,d\n";
  for (std::size_t i = 0; i < n_rows; ++i) {
    double x[4];
    for (double& value : x) value = std::exp(2.0 + 0.5 * normal(random));
    const double y =
        std::exp(1.0 + 0.7 * std::log(x[0]) - 0.05 * x[1] + 0.2 * std::sqrt(x[2]) + sigma * normal(random));
    text << y << ',' << x[0] << ',' << x[1] << ',' << x[2] << ',' << x[3] << '\n';
  }
  return text.str();
}

run::Plan skewed_plan(const TemporaryFolder& folder, std::uint64_t seed, double sigma,
                      const std::vector<std::string>& responses) {
  run::Plan plan = plan_for(folder.write("skewed.csv", skewed_table(seed, 200, sigma)), "y");
  plan.forms.response.emplace();
  for (const auto& response : responses) plan.forms.response->push_back(form_entry(response));
  for (const char* column : {"a", "b", "c", "d"})
    plan.forms.of[column] = {form_entry("identity"), form_entry("sqrt"), form_entry("ln"), form_entry("reciprocal")};
  return plan;
}

struct Screened {
  pipeline::Prepared prepared;
  base::GramSet grams;
};

Screened screened(const run::Plan& plan, unsigned threads = 1) {
  auto table = pipeline::load_table(plan);
  REQUIRE(table.ok());
  auto prepared = pipeline::prepare(std::move(*table), plan);
  REQUIRE(prepared.ok());
  auto grams = design::build_grams(prepared->data, prepared->folds, threads);
  REQUIRE(grams.ok());
  REQUIRE(pipeline::add_own_units(*prepared, *grams, threads).ok());
  return {std::move(*prepared), std::move(*grams)};
}

std::vector<double> ranks(const std::vector<double>& values) {
  std::vector<std::size_t> order(values.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return values[a] < values[b]; });
  std::vector<double> rank(values.size());
  for (std::size_t i = 0; i < order.size(); ++i) rank[order[i]] = static_cast<double>(i);
  return rank;
}

/// Spearman's rank correlation.
double rank_correlation(const std::vector<double>& a, const std::vector<double>& b) {
  const auto p = ranks(a);
  const auto q = ranks(b);
  const double middle = base::mean(p);
  double product = 0.0;
  for (std::size_t i = 0; i < p.size(); ++i) product += (p[i] - middle) * (q[i] - middle);
  return product / base::sum_of_squares(p, middle);
}

/// How many of the `count` least of a are among those of b.
std::size_t common_best(const std::vector<double>& a, const std::vector<double>& b, std::size_t count) {
  const auto p = ranks(a);
  const auto q = ranks(b);
  std::size_t common = 0;
  for (std::size_t i = 0; i < p.size(); ++i)
    if (p[i] < static_cast<double>(count) && q[i] < static_cast<double>(count)) ++common;
  return common;
}

search::WalkResult walked(const Screened& one, std::vector<search::PoolRule> rules) {
  search::WalkOptions options;
  options.rules = std::move(rules);
  options.threads = 1;
  return search::walk(one.prepared.space, one.grams, options);
}

/// Every candidate of the first response form, by all scores.
struct Scores {
  std::vector<double> form_scale, pilot_weight, working_response, exact;
};

Scores all_scores(const Screened& one) {
  const pipeline::Examiner examiner(one.prepared);
  const auto everything = search::count(one.prepared.space).convert_to<std::size_t>();
  const auto all = walked(one, {{search::Score::cv_sse, everything, {}}});
  Scores scores;
  std::vector<search::Choice> choices;
  for (const auto& scored : all.lists[0][0]) {
    const auto examined = examiner.score(scored.choice, scored.number);
    REQUIRE(examined.candidate);
    if (!examined.candidate->cv.rmse) continue;
    scores.form_scale.push_back(scored.cv_sse);
    scores.exact.push_back(*examined.candidate->cv.rmse);
    choices.push_back(scored.choice);
  }
  for (const auto& own : search::own_scores(one.prepared.space, one.grams, choices, 1)) {
    scores.pilot_weight.push_back(own.pilot_weight);
    scores.working_response.push_back(own.working_response);
  }
  return scores;
}

/// The mean of the eight least exact held-out errors in a pool.
double mean_of_best(const Screened& one, const std::vector<search::Scored>& pool) {
  const pipeline::Examiner examiner(one.prepared);
  std::vector<double> errors;
  for (const auto& scored : pool) {
    const auto examined = examiner.score(scored.choice, scored.number);
    REQUIRE(examined.candidate);
    if (examined.candidate->cv.rmse) errors.push_back(*examined.candidate->cv.rmse);
  }
  std::sort(errors.begin(), errors.end());
  REQUIRE(errors.size() >= 8);
  return base::mean(std::span(errors).first(8));
}

}  // namespace

// Generated tables; the form's scale judges relative errors, own units absolute ones.
TEST_CASE("pipeline: screening in own units agrees better with the exact held-out error than the form's scale does",
          "[pipeline][property]") {
  for (const char* response : {"ln", "sqrt"}) {
    for (const std::uint64_t seed : {1u, 2u, 5u}) {
      const TemporaryFolder folder;
      const Scores scores = all_scores(screened(skewed_plan(folder, seed, 0.6, {response})));
      REQUIRE(scores.exact.size() > 500);
      const double form_scale = rank_correlation(scores.form_scale, scores.exact);
      const double pilot_weight = rank_correlation(scores.pilot_weight, scores.exact);
      const double working = rank_correlation(scores.working_response, scores.exact);
      const auto common = [&](const std::vector<double>& score) { return common_best(score, scores.exact, 50); };
      INFO(response << " " << seed << ": " << form_scale << " " << pilot_weight << " " << working
                    << ", best 50: " << common(scores.form_scale) << " " << common(scores.pilot_weight) << " "
                    << common(scores.working_response));
      CHECK(working > form_scale);
      CHECK(common(scores.working_response) > common(scores.form_scale));
    }
  }
}

TEST_CASE("pipeline: lists in own units bring better candidates into a small pool", "[pipeline][property]") {
  double with_own = 0.0;
  double without = 0.0;
  for (const std::uint64_t seed : {1u, 2u, 3u, 4u, 5u, 6u}) {
    const TemporaryFolder folder;
    run::Plan plan = skewed_plan(folder, seed, 0.6, {"ln"});
    plan.search.pool = 16;
    Screened one = screened(plan);
    const auto result = walked(one, pipeline::pool_rules(one.prepared, plan));
    const auto lists = pipeline::pool_lists(one.prepared, plan, one.grams, result, 1);
    REQUIRE(lists.size() == 4);
    const auto pool = pipeline::unite(lists, 16);
    REQUIRE(pool.size() == 16);
    const double best = mean_of_best(one, pool);
    const double plain = mean_of_best(one, pipeline::unite(std::span(lists).first(2), 16));
    with_own += best;
    without += plain;
  }
  CHECK(with_own < without);
}

TEST_CASE("pipeline: the pool says which lists it is taken from and what the own-units ones were drawn from",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = skewed_plan(folder, 3, 0.3, {"identity", "ln"});
  plan.search.pool = 1300;
  const auto space = search_json(plan, folder).at("space");
  CHECK_THAT(space.at("pool_formed").get<std::string>(),
             Catch::StartsWith("the 1,250 best") && Catch::Contains("for ln(y)") && Catch::Contains("own units") &&
                 Catch::Contains("every candidate scored"));
  CHECK(space.at("pool_margin") == "every candidate that was scored is in the pool");
  plan.search.pool = 100;
  const auto smaller = search_json(plan, folder).at("space");
  CHECK_THAT(smaller.at("pool_margin").get<std::string>(),
             Catch::Contains("first candidate left out") && Catch::Contains("for y") && Catch::Contains("for ln(y)"));
}

TEST_CASE("pipeline: own-units lists are drawn from lists of a stated length where the space is larger",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = skewed_plan(folder, 3, 0.3, {"ln"});
  plan.search.pool = 10;
  const Screened one = screened(plan);
  const auto rules = pipeline::pool_rules(one.prepared, plan);
  REQUIRE(rules.front().keep == 5000);
  search::WalkResult full;  // as a walk leaves it when its lists are full
  full.lists.assign(2, {std::vector<search::Scored>(rules.front().keep)});
  CHECK_THAT(pipeline::pool_words(one.prepared, plan, one.grams, full, 10),
             Catch::Contains("the 5,000 best of each response form by held-out error on its scale and by AIC"));
}

TEST_CASE("pipeline: a response in own units alone needs no second pass", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = skewed_plan(folder, 3, 0.3, {"identity"});
  plan.search.pool = 30;
  const Screened one = screened(plan);
  CHECK(one.grams.own_units.empty());
  for (const auto& rule : pipeline::pool_rules(one.prepared, plan)) CHECK(rule.keep == 30);
  const auto result = walked(one, pipeline::pool_rules(one.prepared, plan));
  CHECK(pipeline::pool_lists(one.prepared, plan, one.grams, result, 1).size() == 2);
  CHECK_THAT(pipeline::pool_words(one.prepared, plan, one.grams, result, 30), !Catch::Contains("pilot"));
}

TEST_CASE("pipeline: pilots are the same bits for any number of threads", "[pipeline][property][parallel]") {
  const TemporaryFolder folder;
  run::Plan plan = skewed_plan(folder, 6, 0.5, {"ln", "sqrt"});
  plan.search.repeats = 2;
  const Screened one = screened(plan);
  for (const std::size_t response : {0u, 1u}) {
    const auto first = pipeline::make_pilot(one.prepared, one.grams, response, 1);
    REQUIRE(first);
    REQUIRE(first->slope.size() == 2);
    for (const unsigned threads : {2u, 4u}) {
      const auto other = pipeline::make_pilot(one.prepared, one.grams, response, threads);
      REQUIRE(other);
      CHECK(other->slope == first->slope);
      CHECK(other->working == first->working);
    }
  }
}

TEST_CASE("pipeline: a pilot's working response follows its definition for a logarithm", "[pipeline][property]") {
  // H(p) = c·exp(p), so H′ = H, z* = p − 1 + y/H(p), whatever c
  const TemporaryFolder folder;
  const Screened one = screened(skewed_plan(folder, 7, 0.5, {"ln"}));
  const auto pilot = pipeline::make_pilot(one.prepared, one.grams, 0, 1);
  REQUIRE(pilot);
  std::vector<double> constant;
  for (std::size_t i = 0; i < one.prepared.data.n_rows; ++i) {
    const double mean = pilot->slope[0][i];
    const double at = pilot->working[0][i] + 1.0 - one.prepared.data.response[i] / mean;
    constant.push_back(mean / std::exp(at));
  }
  const auto [least, most] = std::minmax_element(constant.begin(), constant.end());
  CHECK(*most / *least == Approx(1.0).epsilon(1e-5));
  CHECK(*least > 1.0);  // smearing: the mean of exp of residuals
  CHECK(*most < std::exp(0.5));
}

TEST_CASE("pipeline: a pilot stays finite where its back-transform does not exist", "[pipeline][unit]") {
  // 1/y of a wide response: the back-transform of many predictions has no mean
  const TemporaryFolder folder;
  const Screened one = screened(skewed_plan(folder, 8, 0.9, {"reciprocal"}));
  const auto pilot = pipeline::make_pilot(one.prepared, one.grams, 0, 1);
  if (!pilot) return;
  double least = std::numeric_limits<double>::infinity();
  double most = 0.0;
  for (std::size_t i = 0; i < one.prepared.data.n_rows; ++i) {
    CHECK(std::isfinite(pilot->working[0][i]));
    least = std::min(least, std::abs(pilot->slope[0][i]));
    most = std::max(most, std::abs(pilot->slope[0][i]));
  }
  CHECK(least > 0.0);
  CHECK(most <= least * pipeline::kSlopeRange * pipeline::kSlopeRange);
}

}  // namespace formsieve::test

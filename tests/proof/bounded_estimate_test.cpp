// What is said of a bounded walk beforehand against the walk itself.
#include "../search/problem.hpp"
#include "proof/bounded_estimate.hpp"
#include "proof/bounded_walk.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <vector>

using namespace formsieve;

namespace {

constexpr proof::HeldOutRows kRows{1, 1.0};

struct Example {
  test::Problem problem = test::make_problem(5, 90, std::vector<test::Shape>(7, {{1, 1, 1}}), 1, 5);
  base::GramSet grams = test::grams_of(problem);
  proof::BoundedWalkOptions options;

  Example() {
    options.keep = 20;
    options.threads = 1;
    options.effort.leaf_size = 30;
    options.start.neighbourhood = 60;
  }

  std::vector<proof::VisitEstimate> estimate(const proof::EstimateEffort& effort,
                                             std::span<const search::Choice> hints = {}) const {
    return proof::estimate_visits(problem.space, grams, kRows, options, effort, hints);
  }
};

const proof::EstimateEffort kAll{100'000, 100'000, 1, {}};

}  // namespace

TEST_CASE("proof: the estimate is exact once the whole tree was seen", "[proof][property]") {
  const Example example;
  // the best as hints: the limit that the walk starts from never falls
  const auto first = proof::bounded_walk(example.problem.space, example.grams, kRows, example.options);
  std::vector<search::Choice> hints;
  for (const search::Scored& scored : first.lists[0]) hints.push_back(scored.choice);
  const auto walk = proof::bounded_walk(example.problem.space, example.grams, kRows, example.options, hints);
  const auto estimate = example.estimate(kAll, hints);
  REQUIRE(estimate.size() == 1);
  CHECK(walk.counts[0].n_inseparable == 0);
  CHECK(estimate[0].visits == static_cast<double>(walk.counts[0].n_scored));
  CHECK(estimate[0].nodes == static_cast<double>(walk.counts[0].n_nodes));
  CHECK(estimate[0].standard_error == 0.0);
  CHECK(walk.counts[0].n_cut > 1000);
}

TEST_CASE("proof: dives are right on average and say how far they may be off", "[proof][property]") {
  const Example example;
  const double exact = example.estimate(kAll)[0].visits;
  const double nodes = example.estimate(kAll)[0].nodes;
  double sum = 0.0;
  double sum_nodes = 0.0;
  double squares = 0.0;
  double variance = 0.0;
  constexpr int kRuns = 150;
  for (int run = 0; run < kRuns; ++run) {
    const auto estimate = example.estimate({2, 1, static_cast<std::uint64_t>(run), {}})[0];
    REQUIRE(estimate.n_dives == 2);
    sum += estimate.visits / kRuns;
    sum_nodes += estimate.nodes / kRuns;
    squares += std::pow(estimate.visits - exact, 2) / kRuns;
    variance += std::pow(estimate.standard_error, 2) / kRuns;
  }
  const double standard_error = std::sqrt(squares / kRuns);
  CHECK(squares > 0.0);
  CHECK(std::abs(sum - exact) < 4.0 * standard_error);
  CHECK(std::abs(sum_nodes - nodes) < 0.2 * nodes);
  CHECK(variance == Approx(squares).epsilon(0.5));
}

TEST_CASE("proof: the estimate is the same for any number of threads", "[proof][unit][parallel]") {
  Example example;
  const auto one = example.estimate({5, 1000, 3, {}});
  example.options.threads = 4;
  const auto four = example.estimate({5, 1000, 3, {}});
  CHECK(one[0].visits == four[0].visits);
  CHECK(one[0].standard_error == four[0].standard_error);
}

TEST_CASE("proof: an estimate that is stopped promises nothing", "[proof][unit]") {
  Example example;
  std::stop_source source;
  source.request_stop();
  example.options.stop = source.get_token();
  CHECK(std::isinf(example.estimate({})[0].visits));
}

// Proofs of many restrictions that begin at one point of the dual.

#include "proof/warm_start.hpp"
#include "simulated.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstddef>
#include <utility>
#include <vector>

using namespace formsieve;

namespace {

constexpr double kScoreError = 1e-5;

struct Forced {
  std::size_t predictor, choice;
};

std::vector<Forced> all_choices(const search::Space& space) {
  std::vector<Forced> all;
  for (std::size_t j = 0; j < space.predictors.size(); ++j)
    for (std::size_t c = 0; c <= space.predictors[j].forms.size(); ++c) all.push_back({j, c});
  return all;
}

proof::Restriction with(proof::Restriction restriction, Forced forced) {
  restriction.actions.emplace_back(forced.predictor, proof::Actions{1} << forced.choice);
  return restriction;
}

proof::Limits best_alone(const proof::WarmStart* start) {
  proof::Limits limits;
  limits.keep = 1;
  limits.threads = 1;
  limits.start = start;
  return limits;
}

}  // namespace

TEST_CASE("proof: forced choices from a warm start equal enumeration", "[proof][property]") {
  proof::Effort no_enumeration;
  no_enumeration.enumerate_at = 1;
  proof::Effort newton = no_enumeration;
  newton.sweeps_work = 0.0;
  for (std::uint64_t seed = 1; seed <= 25; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 600);
    small.connect();
    const proof::RootGram root(small.problem);
    const proof::WarmStart start = proof::warm_start(root, small.restriction, 1);
    for (const Forced forced : all_choices(small.space)) {
      INFO("seed " << seed << ", predictor " << forced.predictor << ", choice " << forced.choice);
      test::SmallSpace part = small;
      part.connect();
      part.restriction = with(small.restriction, forced);
      const std::vector<test::Scored> expected = test::score_all(part);
      for (const proof::Effort& effort : {no_enumeration, newton}) {
        const proof::Proof result = proof::prove(root, part.restriction, best_alone(&start), {}, effort);
        REQUIRE(result.proved);
        REQUIRE(result.best.size() == (expected.empty() ? 0 : 1));
        if (!expected.empty()) CHECK(std::abs(result.best[0].score - expected[0].score) < kScoreError);
      }
    }
  }
}

TEST_CASE("proof: a warm start leads forced choices to the same bests and begins at a better bound",
          "[proof][property]") {
  test::SimulatedOptions options;
  options.n_predictors = 12;
  options.n_forms = 5;
  options.n_rows = 200;
  options.n_responses = 2;
  test::Simulated problem = test::simulate(options);
  problem.problem.space = &problem.space;
  problem.problem.grams = &problem.grams;
  const proof::RootGram root(problem.problem);
  const proof::WarmStart start = proof::warm_start(root, {}, 1);
  REQUIRE(start.roots.size() == 2);
  for (const auto& point : start.roots) REQUIRE(point != nullptr);
  for (const Forced forced : all_choices(problem.space)) {
    const proof::Proof cold = proof::prove(root, with({}, forced), best_alone(nullptr));
    const proof::Proof warm = proof::prove(root, with({}, forced), best_alone(&start));
    REQUIRE(cold.best.size() == 1);
    REQUIRE(warm.best.size() == 1);
    CHECK(warm.best[0].score == cold.best[0].score);
  }
  proof::Effort no_sweeps;
  no_sweeps.root_sweeps = 0;
  for (std::size_t response = 0; response < 2; ++response) {
    proof::Limits first_node = best_alone(nullptr);
    first_node.nodes = 1;
    const proof::Restriction alone{response, {}};
    const double cold = proof::prove(root, alone, first_node, {}, no_sweeps).lower_bound;
    first_node.start = &start;
    CHECK(proof::prove(root, alone, first_node, {}, no_sweeps).lower_bound > cold + 0.5);
  }
}

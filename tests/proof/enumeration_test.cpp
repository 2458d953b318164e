// The proof against plain enumeration.

#include "proof/scope.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <vector>

using namespace formsieve;

namespace {

/// What rounding may do to a score of these spaces, in a Gram whose pivots may be 1e-8.
constexpr double kScoreError = 1e-5;

proof::Limits limits_of(const test::SmallSpace& small) {
  proof::Limits limits;
  limits.keep = small.keep;
  if (small.within < 1e299) limits.within = small.within;
  limits.threads = 1;
  return limits;
}

/// Bounds so weak that little is cut but by branching.
std::vector<proof::Effort> efforts() {
  proof::Effort usual;
  proof::Effort no_enumeration;
  no_enumeration.enumerate_at = 1;
  proof::Effort weak = no_enumeration;
  weak.root_sweeps = weak.node_sweeps = 0;
  weak.incumbents = false;
  proof::Effort idle = weak;
  idle.strike = false;
  idle.batch = 3;
  proof::Effort newton = no_enumeration;
  newton.sweeps_work = 0.0;
  proof::Effort newton_alone = newton;
  newton_alone.incumbents = false;
  newton_alone.batch = 1;
  return {usual, no_enumeration, weak, idle, newton, newton_alone};
}

/// The same members up to ties: scores agree place by place and every member has its score.
void check_list(const test::SmallSpace& small, const proof::Proof& result, const std::vector<test::Scored>& expected) {
  REQUIRE(result.proved);
  REQUIRE(result.best.size() == expected.size());
  for (std::size_t i = 0; i < expected.size(); ++i) {
    CHECK(std::abs(result.best[i].score - expected[i].score) < kScoreError);
    CHECK(std::abs(result.best[i].score - test::plain_score(small, result.best[i].choice)) < kScoreError);
    for (std::size_t other = 0; other < i; ++other) CHECK(!(result.best[i].choice == result.best[other].choice));
  }
  if (!expected.empty()) CHECK(result.full == (expected.size() == small.keep));
}

void check_space(std::uint64_t seed, std::size_t most_candidates, const std::vector<proof::Effort>& all_efforts) {
  test::SmallSpace small = test::draw_small_space(seed, most_candidates);
  small.connect();
  const std::vector<test::Scored> expected = test::expected_list(small);
  const proof::RootGram root(small.problem);
  for (std::size_t e = 0; e < all_efforts.size(); ++e) {
    INFO("seed " << seed << ", effort " << e << ", expected " << expected.size());
    check_list(small, proof::prove(root, small.restriction, limits_of(small), {}, all_efforts[e]), expected);
  }
}

}  // namespace

TEST_CASE("proof: a list equals enumeration on small random spaces", "[proof][property]") {
  for (std::uint64_t seed = 1; seed <= 60; ++seed) check_space(seed, 2000, efforts());
}

TEST_CASE("proof: a list equals enumeration on many random spaces", "[proof][property][slow]") {
  for (std::uint64_t seed = 1000; seed < 1500; ++seed) check_space(seed, 12000, efforts());
}

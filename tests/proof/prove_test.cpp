// What a proof promises besides its list: limits, restrictions, threads, odd problems.

#include "proof/scope.hpp"
#include "simulated.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

using namespace formsieve;

namespace {

constexpr double kScoreError = 1e-5;
constexpr double kInfinity = std::numeric_limits<double>::infinity();

proof::Limits one_thread(std::size_t keep) {
  proof::Limits limits;
  limits.keep = keep;
  limits.threads = 1;
  return limits;
}

test::Simulated simulated(int n_predictors, int n_forms, int n_rows, const std::string& criterion) {
  test::SimulatedOptions options;
  options.n_predictors = n_predictors;
  options.n_forms = n_forms;
  options.n_rows = n_rows;
  options.criterion = criterion;
  test::Simulated result = test::simulate(options);
  return result;
}

void connect(test::Simulated& simulated) {
  simulated.problem.space = &simulated.space;
  simulated.problem.grams = &simulated.grams;
}

void check_same_list(const proof::Proof& a, const proof::Proof& b) {
  REQUIRE(a.best.size() == b.best.size());
  for (std::size_t i = 0; i < a.best.size(); ++i) {
    CHECK(a.best[i].choice == b.best[i].choice);
    CHECK(a.best[i].score == b.best[i].score);  // the same bits
  }
}

/// Every candidate that is not listed scores at least the bound, and what is listed is real.
void check_valid(const test::SmallSpace& small, const proof::Proof& result) {
  for (const proof::Listed& listed : result.best)
    CHECK(std::abs(listed.score - test::plain_score(small, listed.choice)) < kScoreError);
  for (const test::Scored& scored : test::score_all(small)) {
    const bool listed = std::any_of(result.best.begin(), result.best.end(),
                                    [&](const proof::Listed& entry) { return entry.choice == scored.choice; });
    if (listed) continue;
    CHECK(scored.score > result.lower_bound - kScoreError);
    CHECK(scored.score > result.response_lower_bound.at(scored.choice.response) - kScoreError);
  }
}

/// n rows of `columns` regressions whose response is the sum of three columns, nearly or exactly.
test::SmallSpace exact_fit(double noise) {
  test::SmallSpace small = test::draw_small_space(4, 2000);  // forms of one column, 80 rows
  const std::size_t order = small.grams.order();
  const std::size_t y = small.grams.n_columns;
  std::vector<double>& gram = small.grams.all;
  std::vector<std::size_t> active;
  for (const search::PredictorChoices& predictor : small.space.predictors)
    if (active.size() < 3) active.push_back(predictor.forms[0].first_column);
  double yy = 0.0;
  for (std::size_t i = 0; i < y; ++i) {
    double product = 0.0;
    for (const std::size_t a : active) product += gram[a * order + i] / std::sqrt(gram[a * order + a]);
    gram[i * order + y] = gram[y * order + i] = product;
  }
  for (const std::size_t a : active) yy += gram[a * order + y] / std::sqrt(gram[a * order + a]);
  gram[y * order + y] = yy * (1.0 + noise);
  return small;
}

}  // namespace

TEST_CASE("proof: list, order and node count are the same for any number of threads", "[proof][property][parallel]") {
  for (const char* const criterion : {"AIC", "BIC"}) {
    test::Simulated problem = simulated(14, 5, 90, criterion);
    connect(problem);
    const proof::RootGram root(problem.problem);
    for (const double sweeps_work : {1.0, 0.0}) {
      proof::Effort effort;
      effort.sweeps_work = sweeps_work;
      effort.enumerate_at = 20;
      proof::Limits limits = one_thread(40);
      const proof::Proof one = proof::prove(root, {}, limits, {}, effort);
      CHECK(one.proved);
      CHECK(one.nodes > 20);
      for (const unsigned threads : {2U, 4U}) {
        limits.threads = threads;
        const proof::Proof more = proof::prove(root, {}, limits, {}, effort);
        check_same_list(one, more);
        CHECK(one.nodes == more.nodes);
      }
    }
  }
}

TEST_CASE("proof: different trees prove the same list", "[proof][property]") {
  test::Simulated problem = simulated(16, 6, 120, "AIC");
  connect(problem);
  const proof::RootGram root(problem.problem);
  proof::Effort newton;
  newton.sweeps_work = 0.0;
  newton.incumbents = false;
  newton.batch = 5;
  check_same_list(proof::prove(root, {}, one_thread(60)), proof::prove(root, {}, one_thread(60), {}, newton));
}

TEST_CASE("proof: the answer is valid when time or nodes run out", "[proof][property]") {
  for (std::uint64_t seed = 100; seed < 115; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 1000);
    small.connect();
    const proof::RootGram root(small.problem);
    proof::Effort effort;
    effort.enumerate_at = 1;
    effort.incumbents = seed % 2 == 0;
    for (const std::uint64_t nodes : {0, 1, 5, 40}) {
      INFO("seed " << seed << ", nodes " << nodes);
      proof::Limits limits = one_thread(small.keep);
      limits.nodes = nodes;
      check_valid(small, proof::prove(root, {}, limits, {}, effort));
    }
    proof::Limits limits = one_thread(small.keep);
    limits.enough = [] { return true; };
    const proof::Proof none = proof::prove(root, {}, limits);
    check_valid(small, none);
    CHECK(!none.proved);
  }
}

TEST_CASE("proof: a stop request ends it and the lower bound only rises", "[proof][unit]") {
  test::Simulated problem = simulated(20, 6, 100, "AIC");
  connect(problem);
  const proof::RootGram root(problem.problem);
  std::stop_source stop;
  proof::Limits limits = one_thread(20);
  limits.stop = stop.get_token();
  double last = -kInfinity;
  std::size_t calls = 0;
  limits.progress = [&](const proof::Progress& progress) {
    CHECK(progress.lower_bound >= last - 1e-9);
    last = progress.lower_bound;
    if (++calls == 3) stop.request_stop();
  };
  const proof::Proof result = proof::prove(root, {}, limits);
  CHECK(calls == 3);
  CHECK(result.lower_bound == last);
  CHECK(result.best.size() == 20);
}

TEST_CASE("proof: restrictions leave the candidates they say", "[proof][property]") {
  for (std::uint64_t seed = 200; seed < 240; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 1500);
    small.connect();
    const std::size_t n = small.space.predictors.size();
    const proof::RootGram root(small.problem);
    const std::vector<proof::Actions> all = root.all_actions();
    if (seed % 2 == 0) small.restriction.response = seed / 2 % small.space.n_responses;
    if (seed % 3 == 0) small.restriction.fewest_terms = 1 + seed % n;
    if (seed % 3 == 1) small.restriction.most_terms = seed % n;
    if (seed % 5 < 3) small.restriction.actions.emplace_back(seed % n, all[seed % n] & ~proof::Actions{1});
    if (seed % 5 == 3) small.restriction.actions.emplace_back(seed % n, proof::Actions{5});
    if (seed % 5 == 4) small.restriction.actions.emplace_back(seed % n, proof::Actions{1});
    proof::Effort effort;
    effort.enumerate_at = 1;
    effort.sweeps_work = static_cast<double>(seed % 2);
    INFO("seed " << seed);
    const std::vector<test::Scored> expected = test::expected_list(small);
    proof::Limits limits = one_thread(small.keep);
    limits.within = small.within;
    const proof::Proof result = proof::prove(root, small.restriction, limits, {}, effort);
    CHECK(result.proved);
    REQUIRE(result.best.size() == expected.size());
    for (std::size_t i = 0; i < expected.size(); ++i)
      CHECK(std::abs(result.best[i].score - expected[i].score) < kScoreError);
  }
}

TEST_CASE("proof: nothing to choose from is proved at once", "[proof][unit]") {
  test::SmallSpace small = test::draw_small_space(2, 500);
  small.connect();
  proof::Restriction nothing;
  nothing.actions.emplace_back(0, proof::Actions{0});
  const proof::RootGram root(small.problem);
  const proof::Proof result = proof::prove(root, nothing, one_thread(5));
  CHECK(result.proved);
  CHECK(result.best.empty());
  CHECK(!result.full);
  proof::Restriction too_many;
  too_many.fewest_terms = small.space.predictors.size() + 1;
  CHECK(proof::prove(root, too_many, one_thread(5)).best.empty());
}

TEST_CASE("proof: predictors without forms and spaces without predictors are searched", "[proof][unit]") {
  test::SmallSpace small = test::draw_small_space(4, 500);
  small.space.predictors.push_back({});  // may only be absent
  small.space.max_terms.reset();
  small.within = kInfinity;
  small.connect();
  const proof::RootGram root(small.problem);
  const std::vector<test::Scored> expected = test::expected_list(small);
  const proof::Proof result = proof::prove(root, {}, one_thread(small.keep));
  REQUIRE(result.best.size() == expected.size());
  CHECK(result.best[0].choice.choice.back() == 0);
  CHECK(std::abs(result.best[0].score - expected[0].score) < kScoreError);

  small.space.predictors.clear();
  const proof::RootGram bare(small.problem);
  const proof::Proof only = proof::prove(bare, {}, one_thread(10));
  CHECK(only.proved);
  CHECK(only.best.size() == small.space.n_responses);
  CHECK(only.best[0].rss_rel == 1.0);

  small.space.predictors.push_back({{}, true});  // always in, in no form
  const proof::RootGram impossible(small.problem);
  const proof::Proof none = proof::prove(impossible, {}, one_thread(10));
  CHECK(none.proved);
  CHECK(none.best.empty());
}

TEST_CASE("proof: hints are taken in any order and foreign ones refused", "[proof][unit]") {
  test::Simulated problem = simulated(10, 4, 100, "AIC");
  connect(problem);
  const proof::RootGram root(problem.problem);
  const proof::Proof plain = proof::prove(root, {}, one_thread(10));
  std::vector<search::Choice> hints;
  for (const proof::Listed& listed : plain.best) hints.push_back(listed.choice);
  hints.push_back({7, hints[0].choice});
  hints.push_back({0, {1, 2}});
  hints.push_back({0, std::vector<std::uint16_t>(10, 60)});
  proof::Effort effort;
  effort.incumbents = false;
  check_same_list(plain, proof::prove(root, {}, one_thread(10), hints, effort));
  std::reverse(hints.begin(), hints.end());
  check_same_list(plain, proof::prove(root, {}, one_thread(10), hints, effort));
}

TEST_CASE("proof: an exact fit ends and its smallest candidate comes first", "[proof][unit]") {
  for (const double noise : {0.0, 1e-9}) {
    test::SmallSpace small = exact_fit(noise);
    small.space.max_terms.reset();
    small.connect();
    const proof::RootGram root(small.problem);
    proof::Effort effort;
    effort.enumerate_at = 1;
    const proof::Proof result = proof::prove(root, {}, one_thread(3), {}, effort);
    CHECK(result.proved);
    const std::vector<std::uint16_t>& best = result.best.at(0).choice.choice;
    CHECK(std::count(best.begin(), best.end(), std::uint16_t{0}) == static_cast<long>(best.size()) - 3);
    for (std::size_t j = 0; j < 3; ++j) CHECK(best[j] == 1);
  }
}

TEST_CASE("proof: a predictor that repeats another is never listed beside it", "[proof][unit]") {
  test::Simulated problem = simulated(7, 3, 60, "AIC");
  // predictor 6 takes the columns of predictor 2
  problem.space.predictors[6] = problem.space.predictors[2];
  problem.problem.penalty[0] += 1e-3;  // no two scores alike by chance
  connect(problem);
  const proof::RootGram root(problem.problem);
  proof::Limits limits = one_thread(3000);
  proof::Effort effort;
  effort.enumerate_at = 1;
  const proof::Proof result = proof::prove(root, {}, limits, {}, effort);
  CHECK(result.proved);
  for (const proof::Listed& listed : result.best) {
    const auto& choice = listed.choice.choice;
    const bool repeated = choice[2] != 0 && choice[2] == choice[6];
    CHECK(!repeated);
  }
}

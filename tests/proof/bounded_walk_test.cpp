// The bounded walk against the walk over every candidate, and the inequality that it stands on against explicit refits.
#include "../search/problem.hpp"
#include "proof/bounded_estimate.hpp"
#include "proof/bounded_walk.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <random>
#include <set>

using namespace formsieve;

namespace {

double largest_weight(const test::Problem& problem) {
  return problem.weights.empty() ? 1.0 : *std::max_element(problem.weights.begin(), problem.weights.end());
}

proof::HeldOutRows rows_of(const test::Problem& problem) { return {problem.fold_of.size(), largest_weight(problem)}; }

/// Random sizes, weights, repeats, wide forms, always-in, max_terms, near-collinear forms and predictors, pure noise,
/// fewer rows than columns.
test::Problem draw_problem(std::uint64_t seed) {
  std::mt19937_64 random(seed);
  const auto below = [&](std::size_t n) { return static_cast<std::size_t>(random() % n); };
  std::vector<test::Shape> shapes(3 + below(4));
  for (test::Shape& shape : shapes) {
    shape.form_columns.assign(1 + below(4), 1);
    if (below(5) == 0) shape.form_columns.back() = 2;
    shape.always = below(6) == 0;
  }
  const std::size_t n_rows = below(5) == 0 ? 14 : 30 + below(60);
  const std::size_t n_responses = 1 + below(3);
  const std::size_t n_folds = 3 + below(4);
  test::Problem problem = test::make_problem(seed, n_rows, shapes, n_responses, n_folds, 1 + below(2));
  if (below(3) == 0) problem.space.max_terms = 1 + below(shapes.size());
  if (below(3) == 0)
    for (Eigen::Index i = 0; i < problem.columns.rows(); ++i)
      problem.weights.push_back(std::exp(0.4 * test::normal(random)));
  if (below(4) == 0)  // pure noise
    for (Eigen::Index i = 0; i < problem.responses.rows(); ++i) problem.responses(i, 0) = test::normal(random);
  if (below(4) == 0 && problem.columns.cols() > 2) {  // nearly equal, and equal
    const double apart = below(2) == 0 ? 1e-3 : 1e-7;
    for (Eigen::Index i = 0; i < problem.columns.rows(); ++i)
      problem.columns(i, 0) = problem.columns(i, problem.columns.cols() - 1) + apart * test::normal(random);
    problem.columns.col(1) = problem.columns.col(0);
  }
  return problem;
}

search::WalkResult full_walk(const test::Problem& problem, const base::GramSet& grams, std::size_t keep) {
  search::WalkOptions options;
  options.rules = {{search::Score::cv_sse, keep, {}}};
  options.threads = 1;
  REQUIRE(problem.space.n_responses == grams.n_responses);
  return search::walk(problem.space, grams, options);
}

/// So small that the tree is deep, and everything that it may cut is cut.
proof::BoundedWalkOptions tiny_leaves(std::size_t keep, std::uint64_t leaf_size) {
  proof::BoundedWalkOptions options;
  options.keep = keep;
  options.threads = 1;
  options.effort.leaf_size = leaf_size;
  options.effort.batch = 5;
  options.start.neighbourhood = 30;
  return options;
}

void check_counts(const test::Problem& problem, const proof::BoundedWalk& result) {
  search::Space one = problem.space;
  one.n_responses = 1;
  for (const proof::BoundedCounts& counts : result.counts)
    CHECK(counts.n_scored + counts.n_inseparable + counts.n_cut + counts.n_open == search::count(one));
}

/// Scores agree to the last bit, and so do candidates.
void check_lists(const std::vector<std::vector<search::Scored>>& found,
                 const std::vector<std::vector<search::Scored>>& expected) {
  REQUIRE(found.size() == expected.size());
  for (std::size_t r = 0; r < expected.size(); ++r) {
    REQUIRE(found[r].size() == expected[r].size());
    for (std::size_t i = 0; i < expected[r].size(); ++i) {
      CHECK(found[r][i].choice == expected[r][i].choice);
      CHECK(found[r][i].number == expected[r][i].number);
      CHECK(found[r][i].cv_sse == expected[r][i].cv_sse);
      CHECK(found[r][i].rss == expected[r][i].rss);
      CHECK(found[r][i].n_columns == expected[r][i].n_columns);
    }
  }
}

/// Strong predictors and plain noise.
test::Problem strong_problem(std::uint64_t seed, std::size_t n_predictors, std::size_t n_responses = 1) {
  test::Problem problem =
      test::make_problem(seed, 80, std::vector<test::Shape>(n_predictors, {{1, 1, 1}}), n_responses, 5);
  std::mt19937_64 random(seed + 1);
  for (Eigen::Index i = 0; i < problem.columns.rows(); ++i)
    for (Eigen::Index r = 0; r < problem.responses.cols(); ++r)
      problem.responses(i, r) = std::log(problem.columns(i, 0)) + 0.5 * problem.columns(i, 3) +
                                std::sqrt(std::max(problem.columns(i, 6), 0.0)) + 0.2 * test::normal(random);
  return problem;
}

/// Bounded walks of random spaces with leaves of several sizes.
void check_spaces(std::uint64_t first_seed, std::uint64_t last_seed) {
  search::BigCount n_cut = 0;
  search::BigCount n_inseparable = 0;
  for (std::uint64_t seed = first_seed; seed <= last_seed; ++seed) {
    const test::Problem problem = draw_problem(seed);
    const base::GramSet grams = test::grams_of(problem);
    for (const auto& [keep, leaf_size] : {std::pair<std::size_t, std::uint64_t>{1, 1}, {5, 8}, {40, 60}}) {
      INFO("seed " << seed << ", keep " << keep << ", leaf " << leaf_size);
      const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), tiny_leaves(keep, leaf_size));
      REQUIRE(result.complete);
      check_counts(problem, result);
      check_lists(result.lists, full_walk(problem, grams, keep).lists[0]);
      for (const proof::BoundedCounts& counts : result.counts) {
        n_cut += counts.n_cut;
        n_inseparable += counts.n_inseparable;
      }
    }
  }
  CHECK(n_cut > 2'000);  // else nothing was tested
  CHECK(n_inseparable > 0);
}

}  // namespace

TEST_CASE("proof: the bounded walk lists what the walk over every candidate lists", "[proof][property]") {
  check_spaces(1, 80);
}

TEST_CASE("proof: the bounded walk lists what the walk lists in many more spaces", "[proof][property][slow]") {
  check_spaces(1000, 1600);
}

TEST_CASE("proof: the superset bound alone leaves the same lists", "[proof][property]") {
  for (std::uint64_t seed = 700; seed < 712; ++seed) {
    INFO("seed " << seed);
    const test::Problem problem = draw_problem(seed);
    const base::GramSet grams = test::grams_of(problem);
    proof::BoundedWalkOptions options = tiny_leaves(6, 10);
    options.effort.superset = true;
    const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
    check_counts(problem, result);
    check_lists(result.lists, full_walk(problem, grams, 6).lists[0]);
  }
}

TEST_CASE("proof: held-out sums are never below what the RSS says", "[proof][property]") {
  double least = 1e300;
  for (std::uint64_t seed = 300; seed < 330; ++seed) {
    test::Problem problem = draw_problem(seed);
    if (seed % 2 == 0)
      for (double& w : problem.weights) w *= 7.0;
    const base::GramSet grams = test::grams_of(problem);
    const std::vector<search::Choice> all = test::all_choices(problem.space);
    for (std::size_t i = 0; i < all.size(); i += 1 + all.size() / 12) {
      const test::Refit refit = test::refit(problem, all[i]);
      const double repeats = static_cast<double>(problem.fold_of.size());
      const double bound = refit.rss * repeats / largest_weight(problem);
      CHECK(refit.cv_sse >= bound * (1.0 - 1e-12));
      least = std::min(least, refit.cv_sse / bound);
      // and the conversion says the same the other way round
      const std::size_t r = all[i].response;
      const double scale = grams.response_scale[r] * grams.response_scale[r];
      const proof::HeldOutScale held_out(grams, r, rows_of(problem));
      CHECK(held_out.largest_rss(refit.cv_sse / scale) >= refit.rss / scale * (1.0 - 1e-12));
    }
  }
  CHECK(least < 1.1);  // not a bound that would hold with room for a wrong factor
}

TEST_CASE("proof: strong predictors leave the bounded walk a small share of the space", "[proof][property]") {
  const test::Problem problem = strong_problem(7, 7);
  const base::GramSet grams = test::grams_of(problem);
  const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), tiny_leaves(10, 64));
  check_lists(result.lists, full_walk(problem, grams, 10).lists[0]);
  CHECK(result.counts[0].n_scored < search::count(problem.space) / 5);
}

TEST_CASE("proof: hints need not be good, candidates of the space or different", "[proof][unit]") {
  const test::Problem problem = strong_problem(11, 5, 2);
  const base::GramSet grams = test::grams_of(problem);
  const std::vector<search::Choice> hints = {
      {0, {1, 1, 1, 0, 0}}, {0, {1, 1, 1, 0, 0}}, {0, {9, 9, 9, 9, 9}}, {1, {0, 0}}, {1, {0, 0, 0, 0, 3}}};
  const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), tiny_leaves(2, 10), hints);
  check_lists(result.lists, full_walk(problem, grams, 2).lists[0]);
}

TEST_CASE("proof: the bounded walk is the same for any number of threads", "[proof][property][parallel]") {
  for (std::uint64_t seed = 500; seed < 510; ++seed) {
    const test::Problem problem = seed % 2 == 0 ? draw_problem(seed) : strong_problem(seed, 6, 2);
    const base::GramSet grams = test::grams_of(problem);
    proof::BoundedWalkOptions options = tiny_leaves(8, 20);
    const auto one = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
    for (const unsigned threads : {2u, 4u}) {
      options.threads = threads;
      const auto many = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
      check_lists(many.lists, one.lists);
      for (std::size_t r = 0; r < one.counts.size(); ++r) {
        CHECK(many.counts[r].n_scored == one.counts[r].n_scored);
        CHECK(many.counts[r].n_cut == one.counts[r].n_cut);
        CHECK(many.counts[r].n_nodes == one.counts[r].n_nodes);
      }
    }
  }
}

TEST_CASE("proof: a bounded walk that is stopped says what is open and lists what it met", "[proof][unit]") {
  const test::Problem problem = strong_problem(21, 7);
  const base::GramSet grams = test::grams_of(problem);
  const auto all = full_walk(problem, grams, 100'000).lists[0][0];
  std::stop_source source;
  proof::BoundedWalkOptions options = tiny_leaves(10, 20);
  options.stop = source.get_token();
  int calls = 0;
  double last = 0.0;
  options.progress = [&](double share) {
    CHECK(share >= last);
    CHECK(share <= 1.0);
    last = share;
    if (++calls == 3) source.request_stop();
  };
  const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
  CHECK(!result.complete);
  CHECK(calls == 3);
  CHECK(result.counts[0].n_open > 0);
  check_counts(problem, result);
  REQUIRE(result.lists[0].size() == 10);
  std::size_t at = 0;  // each is a candidate of the space with its score, and they are in order
  for (const search::Scored& listed : result.lists[0]) {
    while (at < all.size() && all[at].number != listed.number) ++at;
    REQUIRE(at < all.size());
    CHECK(all[at].cv_sse == listed.cv_sse);
  }
  options.progress = nullptr;
  const auto never_begun = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
  CHECK(!never_begun.complete);
  CHECK(never_begun.counts[0].n_open == search::count(problem.space));
}

TEST_CASE("proof: a bounded walk keeps to its time", "[proof][unit]") {
  const test::Problem problem = strong_problem(22, 7);
  const base::GramSet grams = test::grams_of(problem);
  proof::BoundedWalkOptions options = tiny_leaves(10, 1);
  options.enough = [] { return true; };
  const auto result = proof::bounded_walk(problem.space, grams, rows_of(problem), options);
  CHECK(!result.complete);
  check_counts(problem, result);
}

TEST_CASE("proof: candidates of a set of actions are counted with and without max_terms", "[proof][unit]") {
  search::Space space;
  space.predictors.resize(3);
  for (search::PredictorChoices& predictor : space.predictors) predictor.forms.resize(3);
  const std::vector<proof::Actions> actions = {0b0111, 0b0110, 0b1001};
  CHECK(proof::count_candidates(space, actions) == 12);
  space.max_terms = 2;  // without (one of 2) · (one of 2) · (1)
  CHECK(proof::count_candidates(space, actions) == 8);
  space.max_terms = 0;
  CHECK(proof::count_candidates(space, actions) == 0);
}

TEST_CASE("proof: a list of none and a list of more than there are", "[proof][unit]") {
  const test::Problem problem = strong_problem(31, 5);
  const base::GramSet grams = test::grams_of(problem);
  const auto none = proof::bounded_walk(problem.space, grams, rows_of(problem), tiny_leaves(0, 10));
  CHECK(none.complete);
  CHECK(none.lists[0].empty());
  CHECK(none.counts[0].n_scored < search::count(problem.space) / 2);
  const auto all = proof::bounded_walk(problem.space, grams, rows_of(problem), tiny_leaves(100'000, 10));
  check_counts(problem, all);
  check_lists(all.lists, full_walk(problem, grams, 100'000).lists[0]);
}

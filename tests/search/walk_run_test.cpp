// How a walk runs: its lists, threads, stopping, progress, calibration.
#include "problem.hpp"
#include "search/walk.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cmath>
#include <limits>
#include <set>
#include <stop_token>

using namespace formsieve;
using search::Score;
using test::Problem;

namespace {

search::WalkOptions short_lists(std::size_t keep) {
  search::WalkOptions options;
  std::vector<double> penalty;
  for (int k = 0; k <= 60; ++k) penalty.push_back(2.0 * k);
  options.rules = {{Score::cv_sse, keep, {}}, {Score::penalised_rss, keep / 2, penalty}};
  options.threads = 1;
  return options;
}

/// Bit-for-bit equality of everything a walk returns.
bool identical(const search::WalkResult& a, const search::WalkResult& b) {
  const auto same = [](const search::Scored& x, const search::Scored& y) {
    return x.choice == y.choice && x.number == y.number && x.cv_sse == y.cv_sse && x.rss == y.rss &&
           x.n_columns == y.n_columns;
  };
  if (a.n_scored != b.n_scored || a.n_inseparable != b.n_inseparable || a.lists.size() != b.lists.size()) return false;
  for (std::size_t rule = 0; rule < a.lists.size(); ++rule)
    for (std::size_t r = 0; r < a.lists[rule].size(); ++r)
      if (!std::equal(a.lists[rule][r].begin(), a.lists[rule][r].end(), b.lists[rule][r].begin(),
                      b.lists[rule][r].end(), same))
        return false;
  return true;
}

/// Predictors 1 and 3 are copies of 0 and 2.
Problem with_duplicates() {
  Problem problem = test::make_problem(21, 50, {{{1, 1}}, {{1, 1}}, {{1}}, {{1}}, {{1, 1}}}, 1, 5);
  problem.columns.col(2) = problem.columns.col(0);
  problem.columns.col(3) = problem.columns.col(1);
  problem.columns.col(5) = problem.columns.col(4);
  return problem;
}

}  // namespace

TEST_CASE("search: lists are the same bits for any number of threads", "[search][property][parallel]") {
  Problem problem =
      test::make_problem(20, 60, {{{1, 1, 1}}, {{1, 2}}, {{1, 1, 1}}, {{1, 1}}, {{1, 1, 1}}, {{1, 1}}, {{1}}}, 2, 5);
  const auto grams = test::grams_of(problem);
  search::WalkOptions options = short_lists(50);
  const auto one = search::walk(problem.space, grams, options);
  CHECK(one.n_scored == search::count(problem.space));
  CHECK(one.lists[0][1].size() == 50);
  CHECK(one.lists[1][0].size() == 25);
  for (const unsigned threads : {2u, 4u, 0u}) {
    options.threads = threads;
    CHECK(identical(search::walk(problem.space, grams, options), one));
  }
}

TEST_CASE("search: short lists are the top of the full lists", "[search][property]") {
  const Problem problem = test::make_problem(22, 60, {{{1, 1, 1}}, {{1, 2}}, {{1, 1, 1}}, {{1, 1}}}, 2, 5);
  const auto grams = test::grams_of(problem);
  const auto full = search::walk(problem.space, grams, test::keep_all(problem.space, 2.0));
  const auto part = search::walk(problem.space, grams, short_lists(30));
  for (std::size_t rule = 0; rule < 2; ++rule)
    for (std::size_t r = 0; r < 2; ++r) {
      const auto& top = part.lists[rule][r];
      REQUIRE(top.size() == (rule == 0 ? 30 : 15));
      for (std::size_t i = 0; i < top.size(); ++i) {
        CHECK(top[i].number == full.lists[rule][r][i].number);
        CHECK(top[i].cv_sse == full.lists[rule][r][i].cv_sse);
      }
    }
}

TEST_CASE("search: lists with ties equal the best of all refits", "[search][property]") {
  const Problem problem = with_duplicates();
  search::WalkOptions options = short_lists(20);
  const auto result = search::walk(problem.space, test::grams_of(problem), options);
  CHECK(result.n_inseparable > 0);

  std::vector<test::Refit> refits;  // without the candidates that hold both copies
  for (const auto& choice : test::all_choices(problem.space)) {
    const auto& c = choice.choice;
    if ((c[0] != 0 && c[0] == c[1]) || (c[2] != 0 && c[3] != 0)) continue;
    refits.push_back(test::refit(problem, choice));
  }
  CHECK(result.n_scored == refits.size());
  std::stable_sort(refits.begin(), refits.end(), [](const auto& a, const auto& b) { return a.cv_sse < b.cv_sse; });
  const auto& list = result.lists[0][0];
  REQUIRE(list.size() == 20);
  std::set<std::string> numbers;
  for (std::size_t i = 0; i < list.size(); ++i) {
    CHECK(list[i].cv_sse == Approx(refits[i].cv_sse).epsilon(1e-9));
    CHECK(list[i].cv_sse == Approx(test::refit(problem, list[i].choice).cv_sse).epsilon(1e-9));
    numbers.insert(list[i].number.str());
  }
  CHECK(numbers.size() == list.size());
}

TEST_CASE("search: exact ties are ordered by candidate number", "[search][unit]") {
  Problem problem = with_duplicates();
  problem.space.max_terms = 1;  // every candidate one step from the root, so that copies tie to the last bit
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  std::size_t ties = 0;
  for (const auto& by_response : result.lists)
    for (std::size_t i = 1; i < by_response[0].size(); ++i)
      if (by_response[0][i].cv_sse == by_response[0][i - 1].cv_sse) {
        ++ties;
        CHECK(by_response[0][i].number > by_response[0][i - 1].number);
      }
  CHECK(ties == 6);
}

TEST_CASE("search: an infinite penalty puts a candidate last", "[search][unit]") {
  const Problem problem = test::make_problem(23, 30, {{{1, 1}}, {{1}}, {{1, 1}}}, 1, 3);
  search::WalkOptions options = test::keep_all(problem.space, 2.0);
  for (std::size_t k = 2; k < options.rules[1].penalty.size(); ++k)
    options.rules[1].penalty[k] = std::numeric_limits<double>::infinity();
  const auto list = search::walk(problem.space, test::grams_of(problem), options).lists[1][0];
  REQUIRE(list.size() == 18);
  for (std::size_t i = 0; i < list.size(); ++i) CHECK((list[i].n_columns < 2) == (i < 6));
  for (std::size_t i = 7; i < list.size(); ++i) CHECK(list[i].number > list[i - 1].number);
}

TEST_CASE("search: a perfect fit scores zero, not below", "[search][unit]") {
  Problem problem = test::make_problem(24, 30, {{{1, 1}}, {{1, 1}}, {{1}}}, 1, 3);
  problem.responses.col(0) = problem.columns.col(0) - 2.0 * problem.columns.col(2);
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  for (const auto& scored : result.lists[0][0]) {
    CHECK(scored.cv_sse >= 0.0);
    CHECK(scored.rss >= 0.0);
  }
  CHECK(result.lists[0][0].front().cv_sse < 1e-20);
}

TEST_CASE("search: a stopped walk says so and counts what it scored", "[search][unit]") {
  const Problem problem = test::make_problem(25, 60, std::vector<test::Shape>(9, {{1, 1, 1, 1}}), 1, 5);
  const auto grams = test::grams_of(problem);
  search::WalkOptions options = short_lists(10);
  SECTION("before it starts") {
    std::stop_source source;
    source.request_stop();
    options.stop = source.get_token();
    const auto result = search::walk(problem.space, grams, options);
    CHECK_FALSE(result.complete);
    CHECK(result.n_scored == 0);
  }
  SECTION("half way") {
    std::stop_source source;
    options.stop = source.get_token();
    std::uint64_t reported = 0;
    options.progress = [&](std::uint64_t scored) {
      reported += scored;
      source.request_stop();
    };
    const auto result = search::walk(problem.space, grams, options);
    CHECK_FALSE(result.complete);
    CHECK(result.n_scored > 0);
    CHECK(result.n_scored < search::count(problem.space));
    CHECK(result.n_scored == reported);
    CHECK(result.lists[0][0].size() == 10);
  }
}

TEST_CASE("search: progress adds up to what was scored", "[search][unit][parallel]") {
  const Problem problem = test::make_problem(26, 60, std::vector<test::Shape>(6, {{1, 1, 1, 1}}), 2, 5);
  search::WalkOptions options = short_lists(10);
  options.threads = 2;
  std::atomic<std::uint64_t> reported = 0;
  options.progress = [&](std::uint64_t scored) { reported += scored; };
  const auto result = search::walk(problem.space, test::grams_of(problem), options);
  CHECK(result.complete);
  CHECK(reported == 31250);
  CHECK(result.n_scored == 31250);
}

TEST_CASE("search: calibration gives a rate in about the time it was given", "[search][unit]") {
  const auto seconds_of = [](const auto& work) {
    const auto start = std::chrono::steady_clock::now();
    work();
    return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  };
  search::WalkOptions options = short_lists(10);
  SECTION("for a space that could never be walked") {
    const Problem problem = test::make_problem(27, 200, std::vector<test::Shape>(30, {{1, 1, 1}}), 1, 5);
    const auto grams = test::grams_of(problem);
    double rate = 0.0;
    CHECK(seconds_of([&] { rate = search::calibrate(problem.space, grams, options, 0.05); }) < 2.0);
    CHECK(rate > 1e3);
    CHECK(rate < 1e10);
  }
  SECTION("for a tiny space") {
    const Problem problem = test::make_problem(28, 30, {{{1, 1}}, {{1}}}, 1, 3);
    const auto grams = test::grams_of(problem);
    CHECK(search::calibrate(problem.space, grams, options, 0.01) > 0.0);
  }
}

TEST_CASE("search: a limit leaves the part of the lists that is not above it", "[search][unit]") {
  const auto problem = test::make_problem(31, 50, {{{1, 1}}, {{1, 2}}, {{1}, true}, {{1, 1, 1}}, {{1, 1}}}, 2, 4);
  const base::GramSet grams = test::grams_of(problem);
  search::WalkOptions options = test::keep_all(problem.space, 2.0);
  const auto all = search::walk(problem.space, grams, options);
  for (const std::size_t rule : {0u, 1u}) {
    for (std::size_t r = 0; r < 2; ++r) {
      const auto& list = all.lists[rule][r];
      const search::Scored& last = list[list.size() / 3];
      const double scale = grams.response_scale[r] * grams.response_scale[r];
      const double penalty = options.rules[1].penalty[last.n_columns] / static_cast<double>(grams.n_rows);
      const double score = (rule == 0 ? last.cv_sse : last.rss * std::exp(penalty)) / scale;
      options.rules[rule].limit.push_back(score * (1.0 + 1e-12));
    }
  }
  for (const std::size_t keep : {std::size_t{5}, std::size_t{1'000'000}}) {
    for (search::PoolRule& rule : options.rules) rule.keep = keep;
    const auto limited = search::walk(problem.space, grams, options);
    CHECK(limited.n_scored == all.n_scored);
    for (std::size_t rule = 0; rule < 2; ++rule) {
      for (std::size_t r = 0; r < 2; ++r) {
        const auto& list = limited.lists[rule][r];
        REQUIRE(list.size() == std::min(keep, all.lists[rule][r].size() / 3 + 1));
        for (std::size_t i = 0; i < list.size(); ++i) CHECK(list[i].number == all.lists[rule][r][i].number);
      }
    }
  }
}

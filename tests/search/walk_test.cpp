// The walk against explicit refits of every candidate.
#include "problem.hpp"
#include "search/walk.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <map>

using namespace formsieve;
using test::Problem;
using test::Refit;
using test::Shape;

namespace {

/// search.md section 3: the walk is held to this on ordinary data.
constexpr double kTolerance_rel = 1e-9;
constexpr double kPenalty = 2.0;

double relative(double a, double b) { return std::abs(a - b) / std::abs(b); }

double penalised(const Problem& problem, const Refit& refit) {
  return refit.rss *
         std::exp(kPenalty * static_cast<double>(refit.n_columns) / static_cast<double>(problem.columns.rows()));
}

/// The list of one response must be all its refits, best first.
void check_list(const std::vector<search::Scored>& list, std::map<search::BigCount, Refit> refits,
                const std::function<double(const search::Scored&)>& score) {
  REQUIRE(list.size() == refits.size());
  double worst_cv = 0.0;
  double worst_rss = 0.0;
  double last = 0.0;
  for (const search::Scored& scored : list) {
    const auto found = refits.find(scored.number);
    REQUIRE(found != refits.end());
    const Refit refit = found->second;
    refits.erase(found);  // so that nothing is scored twice
    CHECK(scored.choice == refit.choice);
    CHECK(scored.n_columns == refit.n_columns);
    worst_cv = std::max(worst_cv, relative(scored.cv_sse, refit.cv_sse));
    worst_rss = std::max(worst_rss, relative(scored.rss, refit.rss));
    CHECK(score(scored) >= last * (1.0 - 1e-14));
    last = score(scored);
  }
  CHECK(worst_cv < kTolerance_rel);
  CHECK(worst_rss < kTolerance_rel);
}

void check_against_refits(const Problem& problem) {
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, kPenalty));
  const std::vector<Refit> refits = test::refit_all(problem);
  REQUIRE(result.complete);
  CHECK(result.n_scored == refits.size());
  CHECK(result.n_inseparable == 0);
  for (std::size_t r = 0; r < problem.space.n_responses; ++r) {
    std::map<search::BigCount, Refit> of_response;
    for (const Refit& refit : refits)
      if (refit.choice.response == r) of_response[search::number_of(problem.space, refit.choice)] = refit;
    check_list(result.lists[0][r], of_response, [](const search::Scored& s) { return s.cv_sse; });
    check_list(result.lists[1][r], of_response, [&](const search::Scored& s) {
      return penalised(problem, {s.choice, s.cv_sse, s.rss, s.n_columns});
    });
  }
}

void set_weights(Problem& problem) {
  std::mt19937_64 random(99);
  for (Eigen::Index i = 0; i < problem.columns.rows(); ++i) problem.weights.push_back(std::exp(test::normal(random)));
}

}  // namespace

TEST_CASE("search: walk equals refits for several predictors, forms and responses", "[search][property]") {
  check_against_refits(test::make_problem(1, 40, {{{1, 1, 1}}, {{1, 1}}, {{1, 1, 1}}, {{1}}, {{1, 1}}}, 2, 5));
}

TEST_CASE("search: walk equals refits with weights", "[search][property]") {
  Problem problem = test::make_problem(2, 40, {{{1, 1, 1}}, {{1, 1}}, {{1, 1}}, {{1, 1}}}, 2, 5);
  set_weights(problem);
  check_against_refits(problem);
}

TEST_CASE("search: walk equals refits with repeats and unequal folds", "[search][property]") {
  Problem problem = test::make_problem(3, 41, {{{1, 1}}, {{1, 1}}, {{1, 1}}}, 1, 4, 3);
  for (std::size_t i = 0; i < 8; ++i) problem.fold_of[1][i] = 2;
  check_against_refits(problem);
}

TEST_CASE("search: walk equals refits with forms of several columns", "[search][property]") {
  check_against_refits(test::make_problem(4, 60, {{{1, 2}}, {{1, 1}}, {{4, 1, 3}}, {{1}}, {{2}}}, 2, 4));
}

TEST_CASE("search: walk equals refits with several wide predictors that are always in", "[search][property]") {
  check_against_refits(test::make_problem(5, 50, {{{1, 1}}, {{2, 1}, true}, {{1, 3}}, {{1, 1}, true}}, 2, 4));
}

TEST_CASE("search: walk equals refits when only what is always in is searched", "[search][property]") {
  check_against_refits(test::make_problem(6, 40, {{{1, 1, 1}, true}, {{1, 2}, true}}, 2, 4));
}

TEST_CASE("search: walk equals refits under max_terms", "[search][property]") {
  for (const std::size_t max_terms : {0u, 1u, 2u, 3u, 4u}) {
    Problem problem = test::make_problem(7, 40, {{{1, 1}}, {{1, 2}}, {{1}}, {{1, 1}}, {{1}}, {{3}}}, 1, 4);
    problem.space.max_terms = max_terms;
    check_against_refits(problem);
  }
}

TEST_CASE("search: walk equals refits under max_terms with weights, repeats and always", "[search][property]") {
  Problem problem =
      test::make_problem(8, 45, {{{1, 1}}, {{1, 2}, true}, {{1, 1}}, {{1, 1}}, {{2, 1}}, {{1}, true}}, 2, 3, 2);
  problem.space.max_terms = 4;
  set_weights(problem);
  check_against_refits(problem);
}

TEST_CASE("search: walk scores the one candidate of a space without predictors", "[search][unit]") {
  check_against_refits(test::make_problem(9, 20, {}, 2, 4));
}

TEST_CASE("search: walk finds nothing when max_terms excludes what is always in", "[search][unit]") {
  Problem problem = test::make_problem(10, 20, {{{1}, true}, {{1}, true}}, 1, 4);
  problem.space.max_terms = 1;
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, kPenalty));
  CHECK(result.complete);
  CHECK(result.n_scored == 0);
  CHECK(result.lists[0][0].empty());
}

TEST_CASE("search: walk equals refits on a space of some thousand candidates", "[search][property]") {
  check_against_refits(
      test::make_problem(11, 36, {{{1, 1, 1}}, {{1, 1, 1}}, {{1, 1, 1}}, {{1, 1, 1}}, {{1, 1}}}, 3, 4));
}

// What the walk does with columns that the others nearly determine (search.md section 3).
#include "problem.hpp"
#include "search/walk.hpp"

#include <catch2/catch.hpp>

#include <cmath>

using namespace formsieve;
using test::Problem;

namespace {

/// Two predictors, the second the first plus `noise` times an independent one, and a third on its own.
Problem near_duplicates(double noise) {
  Problem problem = test::make_problem(31, 80, {{{1}}, {{1}}, {{1}}}, 1, 5);
  std::mt19937_64 random(5);
  const double mean = problem.columns.col(0).mean();
  const double sd = std::sqrt((problem.columns.col(0).array() - mean).square().mean());
  for (Eigen::Index i = 0; i < 80; ++i) {
    problem.columns(i, 1) = problem.columns(i, 0) + noise * sd * test::normal(random);
    problem.responses(i, 0) += 3.0 * test::normal(random);
  }
  return problem;
}

const search::Scored& find(const search::WalkResult& result, const std::vector<std::uint16_t>& choice) {
  for (const auto& scored : result.lists[0][0])
    if (scored.choice.choice == choice) return scored;
  FAIL("candidate not listed");
  throw 0;
}

}  // namespace

TEST_CASE("search: near-duplicate predictors keep the digits that their pivot leaves", "[search][property]") {
  // search.md: the error of the CV sum is about 1e-16 / ρ; a hundred times that is allowed here, since it is a size,
  // not a bound
  for (const double noise : {1e-1, 1e-2, 1e-3}) {
    const Problem problem = near_duplicates(noise);
    const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
    CHECK(result.n_inseparable == 0);
    const double rho = noise * noise;
    for (const std::uint16_t third : {std::uint16_t{0}, std::uint16_t{1}}) {
      const auto& scored = find(result, {1, 1, third});
      const double exact = test::refit(problem, scored.choice).cv_sse;
      CHECK(std::abs(scored.cv_sse - exact) / exact < 1e-14 / rho);
    }
  }
}

TEST_CASE("search: candidates below the smallest pivot are counted, not scored", "[search][unit]") {
  Problem problem = near_duplicates(1e-5);  // ρ ≈ 1e-10
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  CHECK(result.complete);
  CHECK(result.n_scored == 6);
  CHECK(result.n_inseparable == 2);  // both copies, with and without the third predictor
  for (const auto& scored : result.lists[0][0])
    CHECK_FALSE((scored.choice.choice[0] == 1 && scored.choice.choice[1] == 1));

  search::WalkOptions lenient = test::keep_all(problem.space, 2.0);
  lenient.smallest_pivot_rel = 1e-12;
  CHECK(search::walk(problem.space, test::grams_of(problem), lenient).n_scored == 8);
}

TEST_CASE("search: inseparable subtrees are counted in full for every response", "[search][unit]") {
  // predictors 1 and 4 are copies: every candidate with both is inseparable
  Problem problem = test::make_problem(32, 60, {{{1, 1}}, {{1}}, {{1, 1, 1}}, {{2, 1}}, {{1}}, {{1}}}, 3, 4);
  problem.columns.col(9) = 2.0 * problem.columns.col(2).array() + 1.0;
  for (const std::optional<std::size_t> max_terms : {std::optional<std::size_t>{}, std::optional<std::size_t>{3}}) {
    problem.space.max_terms = max_terms;
    std::size_t with_both = 0;
    const auto all = test::all_choices(problem.space);
    for (const auto& choice : all) with_both += choice.choice[1] != 0 && choice.choice[4] != 0 ? 1 : 0;
    const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
    CHECK(with_both > 0);
    CHECK(result.n_inseparable == with_both);
    CHECK(result.n_scored + with_both == all.size());
  }
}

TEST_CASE("search: a copy among the predictors that are always in leaves nothing", "[search][unit]") {
  Problem problem = test::make_problem(33, 60, {{{1, 1}}, {{1}, true}, {{1}, true}}, 2, 4);
  problem.columns.col(3) = problem.columns.col(2);
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  CHECK(result.complete);
  CHECK(result.n_scored == 0);
  CHECK(result.n_inseparable == 6);
}

TEST_CASE("search: a constant column is inseparable and harms no other candidate", "[search][unit]") {
  Problem problem = test::make_problem(34, 60, {{{1, 1}}, {{1, 1}}, {{2}}}, 1, 4);
  problem.columns.col(1).setConstant(3.0);
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  CHECK(result.n_inseparable == 6);
  CHECK(result.n_scored == 12);
  for (const auto& scored : result.lists[0][0]) {
    CHECK(std::isfinite(scored.cv_sse));
    CHECK(scored.cv_sse == Approx(test::refit(problem, scored.choice).cv_sse).epsilon(1e-9));
  }
}

TEST_CASE("search: a form of several columns with a repeated one is inseparable", "[search][unit]") {
  Problem problem = test::make_problem(35, 60, {{{3, 1}}, {{1, 1}}}, 1, 4);
  problem.columns.col(2) = problem.columns.col(0);
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  CHECK(result.n_inseparable == 3);
  CHECK(result.n_scored == 6);
}

TEST_CASE("search: a column that is constant within one training fold is inseparable", "[search][unit]") {
  // all its spread is in the held-out rows of fold 0, so that only that fold's own pivot shows it
  Problem problem = test::make_problem(36, 60, {{{1}}, {{1, 1}}}, 1, 4);
  for (Eigen::Index i = 0; i < 60; ++i)
    problem.columns(i, 0) = problem.fold_of[0][static_cast<std::size_t>(i)] == 0 ? static_cast<double>(i) : 7.0;
  base::GramSet grams = test::grams_of(problem);
  for (std::size_t c = 0; c < grams.order(); ++c) grams.training[0][c] = grams.training[0][c * grams.order()] = 0.0;
  const auto result = search::walk(problem.space, grams, test::keep_all(problem.space, 2.0));
  CHECK(result.n_inseparable == 3);
  CHECK(result.n_scored == 3);
}

TEST_CASE("search: more columns than training rows are inseparable, not wrong", "[search][unit]") {
  const Problem problem = test::make_problem(37, 8, {{{1}}, {{1}}, {{1}}, {{1}}, {{1}}, {{1}}, {{1}}}, 1, 4);
  const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
  // six training rows leave five columns beside the intercept
  CHECK(result.n_inseparable == 7 + 1);
  for (const auto& scored : result.lists[0][0]) CHECK(scored.n_columns <= 5);
}

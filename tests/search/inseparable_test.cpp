#include "problem.hpp"
#include "search/inseparable.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;

TEST_CASE("search: the pairs of predictors behind inseparable candidates are found", "[search][unit]") {
  auto problem = test::make_problem(71, 60, {{{1, 1}}, {{1, 1}}, {{1}}, {{2}}, {{1}}}, 1, 5);
  CHECK(search::inseparable_pairs(problem.space, test::grams_of(problem), 1e-8).empty());

  problem.columns.col(3) = 2.0 * problem.columns.col(0);  // predictor 1, form 2, of predictor 0, form 1
  problem.columns.col(4) = problem.columns.col(5) - problem.columns.col(6);  // predictor 2 within predictor 3
  // predictor 4 is constant but for rows of one fold
  for (Eigen::Index i = 0; i < 60; ++i)
    problem.columns(i, 7) = problem.fold_of[0][static_cast<std::size_t>(i)] == 2 ? static_cast<double>(i) : 7.0;
  base::GramSet grams = test::grams_of(problem);
  // as the Gram matrices of a search have it for what is constant in a fold
  for (std::size_t c = 0; c < grams.order(); ++c)
    grams.training[2][7 * grams.order() + c] = grams.training[2][c * grams.order() + 7] = 0.0;
  const auto pairs = search::inseparable_pairs(problem.space, grams, 1e-8);
  REQUIRE(pairs.size() == 3);
  CHECK((pairs[0].first == 0 && pairs[0].second == 1));
  CHECK((pairs[0].first_choice == 1 && pairs[0].second_choice == 2 && pairs[0].n_pairs_of_forms == 1));
  CHECK((pairs[1].first == 2 && pairs[1].second == 3));
  CHECK((pairs[2].first == 4 && pairs[2].second == 4));
  CHECK(pairs[2].smallest_rel < 1e-8);
}

// Walks of parts of a space against the walk over all of it.
#include "problem.hpp"
#include "search/subspace_walk.hpp"
#include "search/walk.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>

using namespace formsieve;

namespace {

search::Subspace draw_subspace(const search::Space& space, std::size_t response, std::mt19937_64& random) {
  search::Subspace subspace{response, {}};
  for (const search::PredictorChoices& predictor : space.predictors) {
    auto& choices = subspace.choices.emplace_back();
    for (std::size_t c = predictor.always ? 1 : 0; c <= predictor.forms.size(); ++c)
      if (random() % 2 == 0) choices.push_back(static_cast<std::uint16_t>(c));
    if (choices.empty()) choices.push_back(1);
  }
  return subspace;
}

bool contains(const search::Subspace& subspace, const search::Choice& choice) {
  if (choice.response != subspace.response) return false;
  for (std::size_t j = 0; j < choice.choice.size(); ++j)
    if (!std::binary_search(subspace.choices[j].begin(), subspace.choices[j].end(), choice.choice[j])) return false;
  return true;
}

test::Problem mixed_problem(std::uint64_t seed) {
  auto problem =
      test::make_problem(seed, 50, {{{1, 1}}, {{1, 2}}, {{1, 1}, true}, {{1, 1, 1}}, {{1, 1}}, {{1}}, {{1, 1}}}, 2, 4);
  if (seed % 2 == 0) problem.space.max_terms = 4;
  return problem;
}

}  // namespace

TEST_CASE("search: a walk of a subspace scores its candidates and no others", "[search][property]") {
  for (std::uint64_t seed = 1; seed <= 8; ++seed) {
    const test::Problem problem = mixed_problem(seed);
    const base::GramSet grams = test::grams_of(problem);
    const auto all = search::walk(problem.space, grams, test::keep_all(problem.space, 0.0));
    std::mt19937_64 random(seed);
    for (int draw = 0; draw < 20; ++draw) {
      const auto subspace = draw_subspace(problem.space, random() % 2, random);
      std::vector<search::Scored> expected;
      for (const search::Scored& scored : all.lists[0][subspace.response])
        if (contains(subspace, scored.choice)) expected.push_back(scored);
      const double scale = std::pow(grams.response_scale[subspace.response], 2);
      const auto found =
          search::walk_subspace(problem.space, grams, subspace, 1'000'000, std::numeric_limits<double>::infinity());
      CHECK(found.n_scored == expected.size());
      CHECK(found.n_inseparable == 0);
      REQUIRE(found.best.size() == expected.size());
      for (std::size_t i = 0; i < expected.size(); ++i) {
        CHECK(found.best[i].choice == expected[i].choice.choice);
        CHECK(found.best[i].cv_sse * scale == Approx(expected[i].cv_sse).epsilon(1e-11));
        CHECK(found.best[i].rss * scale == Approx(expected[i].rss).epsilon(1e-11));
        CHECK(found.best[i].n_columns == expected[i].n_columns);
      }
      if (expected.size() < 4) continue;
      const double limit = 0.5 * (expected[1].cv_sse + expected[2].cv_sse) / scale;
      CHECK(search::walk_subspace(problem.space, grams, subspace, 10, limit).best.size() == 2);
      CHECK(search::walk_subspace(problem.space, grams, subspace, 1, limit).best.size() == 1);
    }
  }
}

TEST_CASE("search: candidates are scored one by one with the bits of the walk", "[search][property]") {
  // the second space is walked in parts: it is larger than the least of them
  std::vector<test::Problem> problems = {mixed_problem(3), mixed_problem(4),
                                         test::make_problem(9, 60, std::vector<test::Shape>(7, {{1, 1, 1, 1}}), 1, 3)};
  for (const test::Problem& problem : problems) {
    const base::GramSet grams = test::grams_of(problem);
    const auto all = search::walk(problem.space, grams, test::keep_all(problem.space, 0.0));
    for (std::size_t r = 0; r < problem.space.n_responses; ++r) {
      const auto& list = all.lists[0][r];
      const double scale = grams.response_scale[r];
      std::vector<search::Held> some;
      for (std::size_t i = 0; i < list.size(); i += 1 + list.size() / 500)
        some.push_back({list[i].choice.choice, list[i].cv_sse / scale / scale, 0.0, 0});
      const auto scored = search::scored_as_in_walk(problem.space, grams, r, some);
      REQUIRE(scored.size() == some.size());
      for (const search::Held& held : scored) {
        const auto same = std::find_if(list.begin(), list.end(),
                                       [&](const search::Scored& s) { return s.choice.choice == held.choice; });
        REQUIRE(same != list.end());
        CHECK(held.cv_sse * scale * scale == same->cv_sse);
        CHECK(held.rss * scale * scale == same->rss);
        CHECK(held.n_columns == same->n_columns);
      }
    }
  }
}

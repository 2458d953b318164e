// Looks at the neighbours of candidates against each of them fitted by itself.
#include "own_problem.hpp"
#include "problem.hpp"
#include "search/guided_collector.hpp"
#include "search/guided_look.hpp"
#include "search/guided_pairs.hpp"
#include "search/guided_starts.hpp"

#include <formsieve/base.hpp>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstring>

using namespace formsieve;
using search::Choices;
using search::GuidedSpace;
using search::Objective;

namespace {

/// What a look and a fit by itself may differ by, relative to the larger.
constexpr double kTolerance_rel = 1e-9;

struct Made {
  test::Problem problem;
  base::GramSet grams;
};

Made make(std::uint64_t seed, const std::vector<test::Shape>& shapes, std::size_t n_rows = 60) {
  Made made{test::make_problem(seed, n_rows, shapes, 2, 5), {}};
  made.grams = test::grams_of(made.problem);
  test::add_own_units(made.problem, seed, 1, 0.7, made.grams);
  return made;
}

std::vector<Objective> objectives_of(const base::GramSet& grams) {
  std::vector<Objective> objectives;
  objectives.emplace_back(grams, 0, nullptr);
  objectives.emplace_back(grams, 1, nullptr);
  objectives.emplace_back(grams, 1, &grams.own_units.front());
  return objectives;
}

/// Counts comparisons, so that a test that compared nothing fails.
struct Comparison {
  std::size_t n = 0;
  double worst = 0.0;
  void compare(double looked, double fitted) {
    ++n;
    if (looked == fitted) return;  // infinite both
    worst = std::max(worst, std::abs(looked - fitted) / std::max(std::abs(looked), std::abs(fitted)));
  }
};

void compare(const GuidedSpace& space, const Objective& objective, const search::Extensions& extensions,
             Comparison& comparison) {
  search::CandidateFit fit;
  comparison.compare(extensions.base_score, objective.score(space, extensions.base, fit));
  for (std::size_t g = 0; g < space.forms().size(); ++g) {
    const search::OpenForm& form = space.forms()[g];
    if (extensions.base[form.predictor] != 0) continue;
    Choices choices = extensions.base;
    choices[form.predictor] = form.choice;
    comparison.compare(extensions.with[g], objective.score(space, choices, fit));
  }
}

void check_looks(const Made& made, std::uint64_t seed) {
  const GuidedSpace space(made.problem.space);
  for (const Objective& objective : objectives_of(made.grams)) {
    search::Look look(space, objective);
    Comparison comparison;
    for (std::uint64_t i = 0; i < 12; ++i) {
      auto random = search::generator_of(seed, i);
      const Choices candidate = search::random_start(space, space.n_predictors(), random);
      compare(space, objective, look.extend(candidate), comparison);
      const auto& around = look.around(candidate);
      REQUIRE(around.size() == search::n_terms(candidate) + 1);
      for (const auto& extensions : around) {
        for (std::size_t j = 0; j < candidate.size(); ++j)
          CHECK((extensions.base[j] == candidate[j] || extensions.base[j] == 0));
        compare(space, objective, extensions, comparison);
      }
    }
    CHECK(comparison.n > 100);
    CHECK(comparison.worst < kTolerance_rel);
  }
}

}  // namespace

TEST_CASE("search: a look at all neighbours equals fits of each", "[search][property]") {
  for (const std::uint64_t seed : {301u, 302u, 303u})
    check_looks(make(seed, {{{1, 1, 1}}, {{1, 1}}, {{1, 1, 1}}, {{1}}, {{1, 1}}, {{1, 1, 1}}}), seed);
}

TEST_CASE("search: a look equals fits where forms have several columns", "[search][property]") {
  for (const std::uint64_t seed : {311u, 312u})
    check_looks(make(seed, {{{1, 2, 3}}, {{2}}, {{1, 1, 4}}, {{1, 1}, true}, {{3, 1}}}, 80), seed);
}

TEST_CASE("search: a look has the same bits on every instruction set", "[search][unit]") {
  const Made made = make(321, {{{1, 1, 1}}, {{1, 2}}, {{1, 1, 1}}, {{1, 1}}});
  const GuidedSpace space(made.problem.space);
  const Objective objective(made.grams, 1, &made.grams.own_units.front());
  std::vector<std::vector<double>> scores;
  for (const char* name : {"baseline", "avx2", "avx512"}) {
    if (!base::force_instruction_set(name)) continue;
    search::Look look(space, objective);
    scores.emplace_back();
    for (const auto& extensions : look.around({1, 2, 0, 1}))
      scores.back().insert(scores.back().end(), extensions.with.begin(), extensions.with.end());
    search::PairLook pairs(space, objective);
    const auto& of_pair = pairs.look({1, 0, 0, 1}, 1, 2);
    scores.back().insert(scores.back().end(), of_pair.begin(), of_pair.end());
  }
  (void)base::force_instruction_set("best");
  REQUIRE(!scores.empty());
  for (const auto& other : scores) {
    REQUIRE(other.size() == scores.front().size());
    CHECK(std::memcmp(other.data(), scores.front().data(), other.size() * sizeof(double)) == 0);
  }
}

TEST_CASE("search: a look finds copies of a column inseparable and nothing else", "[search][unit]") {
  Made made = make(331, {{{1, 1}}, {{1, 1}}, {{1, 1}}});
  made.problem.columns.col(2) = made.problem.columns.col(0);
  made.grams = test::grams_of(made.problem);
  const GuidedSpace space(made.problem.space);
  const Objective objective(made.grams, 0, nullptr);
  search::Look look(space, objective);
  const auto extensions = look.extend({1, 0, 1});
  CHECK(std::isinf(extensions.with[2]));
  CHECK(std::isfinite(extensions.with[3]));
  CHECK(std::isfinite(extensions.base_score));
  // a base that is inseparable itself
  const auto twice = look.extend({1, 1, 0});
  CHECK(std::isinf(twice.base_score));
  CHECK(std::isinf(twice.with[4]));
}

TEST_CASE("search: a look at two predictors equals fits of every pair of choices", "[search][property]") {
  const Made made = make(341, {{{1, 1, 1}}, {{1, 2}}, {{1, 1}}, {{3}}, {{1, 1, 1}}}, 80);
  const GuidedSpace space(made.problem.space);
  search::CandidateFit fit;
  for (const Objective& objective : objectives_of(made.grams)) {
    search::PairLook look(space, objective);
    Comparison comparison;
    for (const auto& [base, first, second] : {std::tuple{Choices{0, 0, 1, 1, 0}, 0, 1},
                                              {{2, 0, 2, 0, 0}, 1, 3},
                                              {{0, 1, 1, 0, 0}, 0, 4},
                                              {{0, 0, 0, 0, 0}, 4, 1}}) {
      const std::vector<double> scores =
          look.look(base, static_cast<std::size_t>(first), static_cast<std::size_t>(second));
      const std::size_t n_second = 1 + made.problem.space.predictors[static_cast<std::size_t>(second)].forms.size();
      for (std::size_t i = 0; i < scores.size(); ++i) {
        Choices choices = base;
        choices[static_cast<std::size_t>(first)] = static_cast<std::uint16_t>(i / n_second);
        choices[static_cast<std::size_t>(second)] = static_cast<std::uint16_t>(i % n_second);
        comparison.compare(scores[i], objective.score(space, choices, fit));
      }
    }
    CHECK(comparison.n == 4 * 3 + 3 * 2 + 4 * 4 + 4 * 3);
    CHECK(comparison.worst < kTolerance_rel);
  }
}

TEST_CASE("search: different hashes are counted to one in fifty, however split", "[search][property]") {
  for (const std::size_t n : {0u, 10u, 1'000u, 40'000u, 300'000u}) {
    base::SplitMix64 random(n);
    search::DistinctCount parts[3], all;
    for (std::size_t i = 0; i < n; ++i) {
      const std::uint64_t hash = random.next();
      parts[i % 3].add(hash);
      parts[(i + 1) % 3].add(hash);
      all.add(hash);
    }
    parts[2].join(parts[0]);
    parts[2].join(parts[1]);
    CHECK(parts[2].estimate() == all.estimate());
    CHECK(std::abs(all.estimate() - static_cast<double>(n)) <= 0.02 * static_cast<double>(n));
  }
}

TEST_CASE("search: a collector keeps the best, each once, in whatever order they come", "[search][property]") {
  base::SplitMix64 random(5);
  std::vector<std::uint16_t> order(500);
  for (std::size_t i = 0; i < order.size(); ++i) order[i] = static_cast<std::uint16_t>(i);
  for (int trial = 0; trial < 20; ++trial) {
    base::shuffle(std::span(order), random);
    search::Collector collector(30, 400.0);
    for (const std::uint16_t i : order) {
      if (i % 2 == 0) collector.offer(i, i, {i});
      collector.offer(i, i, {i});
    }
    std::vector<double> scores;
    for (const auto& found : collector.found()) scores.push_back(found.score);
    std::sort(scores.begin(), scores.end());
    REQUIRE(scores.size() >= 30);
    CHECK(scores.size() < 60);
    for (std::size_t i = 0; i < 30; ++i) CHECK(scores[i] == static_cast<double>(i));
  }
}

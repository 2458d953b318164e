// The guided search against every candidate of spaces that can be enumerated.
#include "own_problem.hpp"
#include "plain/walk.hpp"
#include "problem.hpp"
#include "search/candidate_fit.hpp"
#include "search/guided.hpp"
#include "search/guided_descent.hpp"
#include "search/own_score.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <optional>
#include <thread>

using namespace formsieve;
using search::Choice;
using search::GuidedList;
using search::GuidedOptions;
using search::GuidedResult;
using test::Shape;

namespace {

struct Made {
  test::Problem problem;
  base::GramSet grams;
  const search::Space& space() const { return problem.space; }
};

/// Response 0 has own units as its scale, the others own-units matrices.
Made make(std::uint64_t seed, const std::vector<Shape>& shapes, std::size_t n_responses = 2, std::size_t n_rows = 60,
          std::optional<std::size_t> max_terms = std::nullopt) {
  Made made{test::make_problem(seed, n_rows, shapes, n_responses, 5), {}};
  made.problem.space.max_terms = max_terms;
  made.grams = test::grams_of(made.problem);
  for (std::size_t r = 1; r < n_responses; ++r) test::add_own_units(made.problem, seed + r, r, 0.8, made.grams);
  return made;
}

/// Responses that depend on nothing, of few rows: many local optima.
Made make_noise(std::uint64_t seed, const std::vector<Shape>& shapes, std::size_t n_rows) {
  Made made = make(seed, shapes, 2, n_rows);
  std::mt19937_64 random(seed);
  for (double& y : made.problem.responses.reshaped()) y = test::normal(random);
  made.grams = test::grams_of(made.problem);
  test::add_own_units(made.problem, seed, 1, 1.2, made.grams);
  return made;
}

GuidedOptions options_of(std::size_t keep, std::size_t restarts) {
  GuidedOptions options;
  options.keep = keep;
  options.restarts = restarts;
  options.expand = keep;
  options.threads = 1;
  options.own_scale = {0};
  return options;
}

/// Every candidate of one response by a score, best first, ties by number; those without a score left out.
struct Oracle {
  std::vector<Choice> choices;
  std::vector<double> sse;
};

Oracle sorted(std::vector<std::pair<double, Choice>> all) {
  std::stable_sort(all.begin(), all.end(), [](const auto& a, const auto& b) { return a.first < b.first; });
  Oracle oracle;
  for (auto& [sse, choice] : all) {
    if (!std::isfinite(sse)) continue;
    oracle.sse.push_back(sse);
    oracle.choices.push_back(std::move(choice));
  }
  return oracle;
}

/// By held-out error, from the plain walk.
Oracle by_cv(const Made& made, std::size_t response) {
  Oracle oracle;
  const auto walked = plain::walk(made.space(), made.grams, test::keep_all(made.space(), 2.0));
  for (const auto& scored : walked.lists[0][response]) {
    oracle.choices.push_back(scored.choice);
    oracle.sse.push_back(scored.cv_sse);
  }
  return oracle;
}

Oracle by_own(const Made& made, std::size_t response) {
  std::vector<Choice> of_response;
  for (const Choice& choice : test::all_choices(made.space()))
    if (choice.response == response) of_response.push_back(choice);
  const auto scores = search::own_scores(made.space(), made.grams, of_response, 1);
  std::vector<std::pair<double, Choice>> all;
  for (std::size_t i = 0; i < scores.size(); ++i) all.emplace_back(scores[i].working_response, of_response[i]);
  return sorted(std::move(all));
}

/// The list holds the very best of all candidates, in order; ties to rounding may stand in any.
void check_list(const GuidedList& list, const Oracle& oracle, std::size_t keep) {
  REQUIRE(list.candidates.size() == std::min(keep, oracle.sse.size()));
  REQUIRE(list.sse.size() == list.candidates.size());
  for (std::size_t i = 0; i < list.sse.size(); ++i) CHECK(list.sse[i] == Approx(oracle.sse[i]).epsilon(1e-9));
  CHECK(list.candidates.front().choice == oracle.choices.front());
  CHECK(list.n_found_best <= list.n_starts);
  CHECK(list.n_found_best > 0);
}

/// The figures of listed candidates, bit for bit, and that each may be listed.
void check_figures(const Made& made, const GuidedList& list, bool own) {
  for (std::size_t i = 0; i < list.candidates.size(); ++i) {
    const auto& scored = list.candidates[i];
    std::size_t terms = 0;
    for (std::size_t j = 0; j < scored.choice.choice.size(); ++j) {
      if (scored.choice.choice[j] != 0) ++terms;
      if (made.space().predictors[j].always) CHECK(scored.choice.choice[j] != 0);
    }
    CHECK(terms <= made.space().max_terms.value_or(terms));
    CHECK(scored.number == search::number_of(made.space(), scored.choice));
    std::vector<std::size_t> columns;
    search::columns_of(made.space(), scored.choice.choice, columns);
    search::CandidateFit fit;
    const double unit = std::pow(made.grams.response_scale[scored.choice.response], 2);
    const double cv_sse = search::cv_sse_of(made.grams, columns, scored.choice.response, fit) * unit;
    CHECK(std::isfinite(cv_sse));
    CHECK(scored.cv_sse == cv_sse);
    CHECK(scored.n_columns == columns.size());
    const double sse =
        own ? search::own_scores(made.space(), made.grams, std::vector{scored.choice}, 1).front().working_response
            : cv_sse;
    CHECK(list.sse[i] == sse);
    if (i == 0) continue;
    CHECK(list.sse[i] >= list.sse[i - 1]);
    if (list.sse[i] == list.sse[i - 1]) CHECK(list.candidates[i].number > list.candidates[i - 1].number);
  }
}

void check_all(const Made& made, const GuidedOptions& options) {
  const GuidedResult result = search::guided(made.space(), made.grams, options);
  CHECK(result.complete);
  std::vector<double> best;
  for (std::size_t r = 0; r < made.space().n_responses; ++r) {
    check_list(result.by_cv[r], by_cv(made, r), options.keep);
    check_figures(made, result.by_cv[r], false);
    if (r == 0) {
      best.push_back(result.by_cv[r].sse.front());
      CHECK(result.by_own[r].candidates.empty());
      continue;
    }
    check_list(result.by_own[r], by_own(made, r), options.keep);
    check_figures(made, result.by_own[r], true);
    best.push_back(result.by_own[r].sse.front());
  }
  CHECK(result.best_response == std::min_element(best.begin(), best.end()) - best.begin());
  CHECK(result.n_scored <= search::count(made.space()));
}

void check_same(const GuidedResult& a, const GuidedResult& b) {
  CHECK(a.n_scored == b.n_scored);
  for (std::size_t r = 0; r < a.by_cv.size(); ++r)
    for (const auto& [one, other] : {std::pair{&a.by_cv[r], &b.by_cv[r]}, {&a.by_own[r], &b.by_own[r]}}) {
      REQUIRE(one->sse == other->sse);
      for (std::size_t i = 0; i < one->sse.size(); ++i) {
        CHECK(one->candidates[i].choice == other->candidates[i].choice);
        CHECK(one->candidates[i].rss == other->candidates[i].rss);
      }
      CHECK(one->n_found_best == other->n_found_best);
      CHECK(one->n_starts == other->n_starts);
    }
}

const std::vector<Shape> kPlainShapes = {{{1, 1, 1}}, {{1, 1}}, {{1, 1, 1}}, {{1}}, {{1, 1, 1}}};

}  // namespace

TEST_CASE("search: the guided search finds the best of every enumerable space", "[search][property]") {
  for (std::uint64_t seed = 400; seed < 425; ++seed) {
    INFO("seed " << seed);
    check_all(make(seed, kPlainShapes), options_of(15, 48));
  }
}

TEST_CASE("search: the guided search finds the best under max_terms", "[search][property]") {
  for (std::uint64_t seed = 430; seed < 445; ++seed) {
    INFO("seed " << seed);
    check_all(make(seed, kPlainShapes, 2, 60, 1 + seed % 3), options_of(10, 48));
  }
}

TEST_CASE("search: the guided search finds the best with predictors always in and forms of several columns",
          "[search][property]") {
  for (std::uint64_t seed = 450; seed < 460; ++seed) {
    INFO("seed " << seed);
    check_all(make(seed, {{{1, 2}, true}, {{1, 1, 3}}, {{2}}, {{1, 1}}, {{1, 2}}}, 3, 70), options_of(10, 64));
    check_all(make(seed, {{{1, 2}}, {{1, 1}, true}, {{2}}, {{1, 1}, true}, {{1, 1, 1}}}, 2, 70, 3), options_of(10, 48));
  }
}

TEST_CASE("search: the guided search finds the best where rows are few and noise is all", "[search][property]") {
  for (std::uint64_t seed = 470; seed < 480; ++seed) {
    INFO("seed " << seed);
    const Made made = make_noise(seed, kPlainShapes, 24);
    check_all(made, options_of(5, 96));
  }
}

TEST_CASE("search: the guided search finds the best of spaces of which it sees a part", "[search][property]") {
  const std::vector<Shape> shapes(7, Shape{{1, 1, 1}});
  for (std::uint64_t seed = 550; seed < 553; ++seed) {
    INFO("seed " << seed);
    const Made made = make(seed, shapes, 2, 50);
    GuidedOptions options = options_of(20, 60);
    options.expand = 10;
    const GuidedResult result = search::guided(made.space(), made.grams, options);
    CHECK(result.n_scored < search::count(made.space()) / 2);
    const GuidedList& own = result.by_own[1];
    const Oracle oracle = by_own(made, 1);
    for (std::size_t i = 0; i < 10; ++i) CHECK(own.candidates[i].choice == oracle.choices[i]);
    for (std::size_t r = 0; r < 2; ++r) {
      const Oracle cv = by_cv(made, r);
      for (std::size_t i = 0; i < 10; ++i) CHECK(result.by_cv[r].candidates[i].choice == cv.choices[i]);
    }
  }
}

TEST_CASE("search: the guided search scores a small space whole when all of it is kept", "[search][unit]") {
  const Made made = make(481, {{{1, 1}}, {{1, 1, 1}}, {{1}}});
  const GuidedResult result = search::guided(made.space(), made.grams, options_of(1000, 16));
  for (std::size_t r = 0; r < 2; ++r) {
    CHECK(result.by_cv[r].candidates.size() == 3 * 4 * 2);
    CHECK(result.by_cv[r].n_expanded == 3 * 4 * 2);
  }
  CHECK(result.n_scored == 2 * 3 * 4 * 2);
}

TEST_CASE("search: the guided search is the same for any number of threads", "[search][property][parallel]") {
  const Made made = make(491, {{{1, 1, 1}}, {{1, 2}}, {{1, 1, 1}}, {{1, 1}, true}, {{1, 1, 1}}, {{1, 1}}}, 3, 60, 4);
  GuidedOptions options = options_of(25, 40);
  const GuidedResult one = search::guided(made.space(), made.grams, options);
  for (const unsigned threads : {1u, 2u, 4u}) {
    options.threads = threads;
    check_same(one, search::guided(made.space(), made.grams, options));
  }
}

TEST_CASE("search: a guided search that has had enough depends on its rounds alone", "[search][property][parallel]") {
  const Made made = make(492, kPlainShapes, 2);
  const auto run = [&](unsigned threads, std::size_t rounds) {
    GuidedOptions options = options_of(12, 10'000);
    options.threads = threads;
    std::size_t n_done = 0;
    options.progress = [&](const search::GuidedProgress&) { ++n_done; };
    options.enough = [&] { return n_done >= rounds; };
    return search::guided(made.space(), made.grams, options);
  };
  const GuidedResult two = run(1, 2);
  CHECK_FALSE(two.complete);
  CHECK(two.n_restarts == run(4, 2).n_restarts);
  CHECK(run(1, 3).n_restarts > two.n_restarts);
  check_same(two, run(4, 2));
}

TEST_CASE("search: a stopped guided search hands back what it has", "[search][unit]") {
  const Made made = make(493, kPlainShapes, 2);
  std::stop_source source;
  GuidedOptions options = options_of(12, 1'000'000);
  options.stop = source.get_token();
  options.progress = [&](const search::GuidedProgress& progress) {
    CHECK(progress.n_scored > 0);
    source.request_stop();
  };
  const GuidedResult result = search::guided(made.space(), made.grams, options);
  CHECK_FALSE(result.complete);
  REQUIRE(!result.by_cv[0].candidates.empty());
  check_figures(made, result.by_cv[0], false);
  // stopped before it began: nothing, and it says so
  const GuidedResult nothing = search::guided(made.space(), made.grams, options);
  CHECK_FALSE(nothing.complete);
  CHECK(nothing.by_cv[0].candidates.empty());
}

TEST_CASE("search: a guided search stopped in the middle of a round ends soon with a list",
          "[search][unit][parallel]") {
  const Made made = make(494, std::vector<Shape>(20, Shape{{1, 1, 1}}), 2, 80);
  std::stop_source source;
  GuidedOptions options = options_of(50, 100'000'000);
  options.threads = 2;
  options.stop = source.get_token();
  std::thread stopper([&] {
    std::this_thread::sleep_for(std::chrono::milliseconds(200));
    source.request_stop();
  });
  const GuidedResult result = search::guided(made.space(), made.grams, options);
  stopper.join();
  CHECK_FALSE(result.complete);
  REQUIRE(!result.by_own[1].candidates.empty());
  check_figures(made, result.by_own[1], true);
}

TEST_CASE("search: the guided search never lists what cannot be separated", "[search][property]") {
  for (std::uint64_t seed = 500; seed < 505; ++seed) {
    Made made = make(seed, {{{1, 1}}, {{1, 1}}, {{1, 1}, true}, {{1, 1}}});
    made.problem.columns.col(2) = 3.0 * made.problem.columns.col(0);
    made.problem.columns.col(6) = made.problem.columns.col(4);
    made.grams = test::grams_of(made.problem);
    test::add_own_units(made.problem, seed, 1, 0.5, made.grams);
    const GuidedResult result = search::guided(made.space(), made.grams, options_of(1000, 32));
    // 3 · 3 · 2 · 3 candidates, less those with both of a pair of copies: 2 · 3 with the first, 9 with the second, one
    // both
    CHECK(by_cv(made, 0).sse.size() == 54 - 6 - 9 + 1);
    for (std::size_t r = 0; r < 2; ++r) {
      CHECK(result.by_cv[r].candidates.size() == 54 - 6 - 9 + 1);
      check_figures(made, result.by_cv[r], false);
    }
    check_figures(made, result.by_own[1], true);
    check_list(result.by_own[1], by_own(made, 1), 1000);
  }
}

TEST_CASE("search: the guided search ends at exact fits", "[search][unit]") {
  Made made = make(511, kPlainShapes);
  made.problem.responses.col(0) = 2.0 * made.problem.columns.col(1) - made.problem.columns.col(6);
  made.grams = test::grams_of(made.problem);
  test::add_own_units(made.problem, 511, 1, 0.5, made.grams);
  const GuidedResult result = search::guided(made.space(), made.grams, options_of(20, 32));
  CHECK(result.complete);
  const auto& best = result.by_cv[0].candidates.front();
  CHECK(best.cv_sse / made.problem.responses.col(0).squaredNorm() < 1e-13);
  CHECK(best.cv_sse >= 0.0);
  CHECK(best.choice.choice[0] == 2);
  CHECK(best.choice.choice[2] == 2);
}

TEST_CASE("search: a guided search has no lists where there is no candidate", "[search][unit]") {
  const Made made = make(521, {{{1, 1}, true}, {{1}, true}}, 2, 40, 1);
  const GuidedResult result = search::guided(made.space(), made.grams, options_of(20, 32));
  CHECK(result.complete);
  CHECK(result.n_scored == 0);
  for (std::size_t r = 0; r < 2; ++r) CHECK(result.by_cv[r].candidates.empty());
}

TEST_CASE("search: without predictors the guided search lists the candidate without any", "[search][unit]") {
  Made made = make(522, {{{1}}}, 1, 40);
  made.problem.space.predictors.clear();
  const GuidedResult result = search::guided(made.space(), made.grams, options_of(20, 16));
  REQUIRE(result.by_cv[0].candidates.size() == 1);
  CHECK(result.by_cv[0].candidates.front().n_columns == 0);
}

TEST_CASE("search: the guided search starts from hints", "[search][unit]") {
  const Made made = make(531, kPlainShapes);
  GuidedOptions options = options_of(4, 0);
  options.expand = 0;
  const Choice best = by_cv(made, 0).choices.front();
  options.hints = {best, {0, {9, 0, 0, 0, 0}}};  // the second is no candidate
  const GuidedResult result = search::guided(made.space(), made.grams, options);
  REQUIRE(!result.by_cv[0].candidates.empty());
  CHECK(result.by_cv[0].candidates.front().choice == best);
}

TEST_CASE("search: response forms are compared only where scores are in own units", "[search][unit]") {
  Made made = make(541, kPlainShapes, 2);
  GuidedOptions options = options_of(5, 64);
  made.grams.own_units.front().sse_factor = 1e-9;
  CHECK(search::guided(made.space(), made.grams, options).best_response == 1);
  made.grams.own_units.front().sse_factor = 1e9;
  CHECK(search::guided(made.space(), made.grams, options).best_response == 0);
  options.own_scale.clear();
  CHECK(search::guided(made.space(), made.grams, options).best_response == 1);
  made.grams.own_units.clear();
  CHECK_FALSE(search::guided(made.space(), made.grams, options).best_response.has_value());
}

TEST_CASE("search: a descent goes on under a response form that is better", "[search][unit]") {
  const Made made = make(542, kPlainShapes, 2);
  const search::GuidedSpace space(made.space());
  search::DescentSetup setup{space, {}, {true, true}, 10, {}, {{}, {}}, {1e300, 1e300}};
  setup.objectives.emplace_back(made.grams, 0, nullptr);
  setup.objectives.emplace_back(made.grams, 1, &made.grams.own_units.front());
  const auto legs_from = [&](std::size_t objective) {
    search::Scout scout(space, setup.objectives, setup.keep, setup.limit);
    return search::Descent(setup, scout, 1).run(objective, {0, 0, 0, 0, 0});
  };
  const auto first = legs_from(0);
  const auto second = legs_from(1);
  const bool second_is_better = second.back().score < first.front().score;
  CHECK(first.size() + second.size() == 3);  // from one of the two, not from the other
  const auto& both = first.size() == 2 ? first : second;
  CHECK(both.front().objective == (second_is_better ? 0u : 1u));
  CHECK(both.back().score < both.front().score);
  CHECK(both.back().path.front() == *both.front().ending);
  setup.comparable = {true, false};
  CHECK(legs_from(0).size() == 1);
  CHECK(legs_from(1).size() == 1);
}

namespace {
const std::vector<Shape> kOptional(5, Shape{{1, 1, 1}});
const std::vector<Shape> kAlways(4, Shape{{1, 1, 1, 1, 1}, true});  // their forms depend on each other
}  // namespace

TEST_CASE("search: a descent ends where no change of one or two predictors is an improvement", "[search][property]") {
  for (std::uint64_t seed = 560; seed < 600; ++seed) {
    INFO("seed " << seed);
    const Made made = make_noise(seed, seed % 2 == 0 ? kOptional : kAlways, 24);
    const search::GuidedSpace space(made.space());
    search::DescentSetup setup{space, {}, {false}, 10, {}, {{}}, {1e300}};
    setup.objectives.emplace_back(made.grams, 1, &made.grams.own_units.front());
    search::Scout scout(space, setup.objectives, setup.keep, setup.limit);
    const auto legs = search::Descent(setup, scout, seed).run(0, search::Choices(made.space().predictors.size(), 1));
    REQUIRE(legs.size() == 1);
    const search::Choices& end = *legs[0].ending;
    const Oracle oracle = by_own(made, 1);
    CHECK(legs[0].path.back() == end);
    for (std::size_t i = 0; i < oracle.sse.size() && oracle.choices[i].choice != end; ++i) {
      // what is better differs from the ending in three predictors, or in two of which one is not in it
      const search::Choices& better = oracle.choices[i].choice;
      std::size_t n_changes = 0, n_absent = 0;
      for (std::size_t j = 0; j < end.size(); ++j) {
        if (better[j] == end[j]) continue;
        ++n_changes;
        if (end[j] == 0) ++n_absent;
      }
      const bool exchange = n_changes == 2 && n_absent == 1 && search::n_terms(better) == search::n_terms(end);
      CHECK(n_changes >= 2);
      CHECK_FALSE(exchange);
      if (n_changes == 2) CHECK(n_absent > 0);
    }
  }
}

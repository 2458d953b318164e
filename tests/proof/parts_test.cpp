// Reduced problems, single changes, small nodes and the list, each against a plain way.

#include "proof/enumerate.hpp"
#include "proof/open_nodes.hpp"
#include "proof/reduced.hpp"
#include "proof/scope.hpp"
#include "proof/settle.hpp"
#include "proof/shortlist.hpp"
#include "proof/single_changes.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>

using namespace formsieve;

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

double uniform(std::mt19937_64& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }

search::Choice random_choice(std::mt19937_64& random, const test::SmallSpace& small) {
  search::Choice choice{random() % small.space.n_responses, {}};
  for (const search::PredictorChoices& predictor : small.space.predictors) {
    const std::size_t n = predictor.forms.size() + (predictor.always ? 0 : 1);
    choice.choice.push_back(static_cast<std::uint16_t>(random() % n + (predictor.always ? 1 : 0)));
  }
  return choice;
}

}  // namespace

TEST_CASE("proof: the canonical score equals that of plain elimination", "[proof][property]") {
  std::mt19937_64 random(1);
  std::size_t infinite = 0;
  for (std::uint64_t seed = 1; seed <= 60; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 2000);
    small.connect();
    const proof::RootGram root(small.problem);
    proof::CandidateScorer scorer(root);
    for (int trial = 0; trial < 50; ++trial) {
      const search::Choice choice = random_choice(random, small);
      const double expected = test::plain_score(small, choice);
      const double score = scorer(choice.response, choice.choice).score;
      infinite += std::isfinite(expected) ? 0 : 1;
      CHECK((score == expected || std::abs(score - expected) < 1e-5));
    }
  }
  CHECK(infinite > 10);
}

TEST_CASE("proof: a reduced problem gives the RSS of its candidates", "[proof][property]") {
  for (std::uint64_t seed = 1; seed <= 40; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 2000);
    small.connect();
    std::mt19937_64 random(seed);
    const proof::RootGram root(small.problem);
    proof::CandidateScorer scorer(root);
    // every second predictor decided; of the open ones one form comes in
    std::vector<proof::Actions> actions = root.all_actions();
    const search::Choice choice = random_choice(random, small);
    for (std::size_t j = 0; j < actions.size(); j += 2) actions[j] = proof::Actions{1} << choice.choice[j];
    const proof::Reduced node = proof::reduce(root, choice.response, actions);
    if (!node.separable) continue;
    for (const proof::OpenPredictor& predictor : node.open) {
      for (const proof::OpenForm& form : predictor.forms) {
        std::vector<std::uint16_t> with = node.fixed;
        with[predictor.predictor] = static_cast<std::uint16_t>(form.form + 1);
        const proof::CandidateScore score = scorer(choice.response, with);
        if (!form.separable) CHECK(score.score == kInfinity);
        const Eigen::MatrixXd own = node.m.block(form.first, form.first, form.n_columns, form.n_columns);
        if (score.score == kInfinity || own.diagonal().minCoeff() < 1e-4) continue;
        const Eigen::VectorXd b = node.b.segment(form.first, form.n_columns);
        CHECK(std::abs(node.yy - b.dot(own.llt().solve(b)) - score.rss_rel) < 1e-9);
        CHECK(node.fixed_columns + static_cast<std::size_t>(form.n_columns) == score.n_columns);
      }
    }
  }
}

TEST_CASE("proof: scores of single changes equal canonical ones", "[proof][property]") {
  std::size_t compared = 0;
  for (std::uint64_t seed = 1; seed <= 60; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 2000);
    small.connect();
    std::mt19937_64 random(seed);
    const proof::RootGram root(small.problem);
    const proof::Scope scope = proof::scope_of(root, {});
    proof::CandidateScorer scorer(root);
    proof::SingleChanges changes(root, scope);
    const search::Choice from = random_choice(random, small);
    if (!scope.contains(from.response, from.choice)) continue;
    std::size_t calls = 0;
    const bool separable = changes(from, [&](std::size_t predictor, std::uint16_t choice, double score) {
      search::Choice changed = from;
      changed.choice[predictor] = choice;
      CHECK(scope.contains(changed.response, changed.choice));
      CHECK(!(changed == from));
      const double expected = scorer(changed.response, changed.choice).score;
      CHECK((expected == score || std::abs(expected - score) < 1e-3));
      ++calls;
    });
    if (separable) compared += calls;
  }
  CHECK(compared > 200);
}

TEST_CASE("proof: a small node gives all its candidates under the threshold", "[proof][property]") {
  for (std::uint64_t seed = 300; seed < 340; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 500);
    small.space.n_responses = 1;
    small.connect();
    const proof::RootGram root(small.problem);
    const proof::Reduced node = proof::reduce(root, 0, root.all_actions());
    const std::vector<test::Scored> all = test::score_all(small);
    const double threshold = all[all.size() / 2].score + 1e-4;
    std::vector<proof::Found> found;
    const std::size_t most_terms = small.space.max_terms.value_or(small.space.predictors.size());
    const std::uint64_t met = proof::enumerate(root, node, {0, 100, 0, most_terms}, threshold, found);
    const auto expected =
        std::count_if(all.begin(), all.end(), [&](const test::Scored& s) { return s.score <= threshold; });
    INFO("seed " << seed);
    CHECK(static_cast<long>(found.size()) == expected);
    CHECK(met == search::count(small.space));
  }
}

TEST_CASE("proof: a list is the same in whatever order candidates come", "[proof][property]") {
  std::mt19937_64 random(5);
  std::vector<std::pair<search::Choice, proof::CandidateScore>> offers;
  for (std::uint16_t i = 0; i < 200; ++i)
    offers.push_back({{0, {i, static_cast<std::uint16_t>(i % 3)}}, {std::floor(20 * uniform(random)), 0.5, 2}});
  const auto listed = [&](std::size_t keep, double within) {
    proof::Shortlist list(keep, within);
    for (const auto& [choice, score] : offers) list.offer(choice, score);
    for (const auto& [choice, score] : offers) CHECK(!list.offer(choice, score));  // none twice
    return list.entries();
  };
  for (const double within : {kInfinity, 3.0}) {
    const std::vector<proof::Listed> first = listed(30, within);
    std::shuffle(offers.begin(), offers.end(), random);
    const std::vector<proof::Listed> second = listed(30, within);
    REQUIRE(first.size() == second.size());
    for (std::size_t i = 0; i < first.size(); ++i) {
      CHECK(first[i].choice == second[i].choice);
      CHECK(first[i].score <= first[0].score + within);
    }
  }
  proof::Shortlist list(3, kInfinity);
  CHECK(!list.offer({0, {1}}, {kInfinity, 0.0, 1}));
  CHECK(list.threshold() == kInfinity);
}

TEST_CASE("proof: counting takes away only actions that no candidate of the ranges has", "[proof][property]") {
  for (std::uint64_t seed = 400; seed < 460; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 400);
    small.space.n_responses = 1;
    small.connect();
    const proof::RootGram root(small.problem);
    proof::Scope scope = proof::scope_of(root, {});
    scope.fewest_terms = seed % 3;
    proof::Node node;
    node.fewest_columns = seed % 4;
    node.most_columns = node.fewest_columns + seed % 3;
    node.actions = scope.actions;
    const proof::Node before = node;
    const bool any = proof::settle(root, scope, node);
    std::size_t inside = 0;
    for (const test::Scored& scored : test::score_all(small)) {
      std::size_t columns = 0;
      for (std::size_t j = 0; j < scored.choice.choice.size(); ++j)
        if (scored.choice.choice[j] != 0)
          columns += small.space.predictors[j].forms[scored.choice.choice[j] - 1u].n_columns;
      if (!scope.contains(0, scored.choice.choice) || columns < before.fewest_columns || columns > before.most_columns)
        continue;
      ++inside;
      REQUIRE(any);
      CHECK(columns >= node.fewest_columns);
      CHECK(columns <= node.most_columns);
      for (std::size_t j = 0; j < node.actions.size(); ++j)
        CHECK((node.actions[j] >> scored.choice.choice[j] & 1) == 1);
    }
    if (!any) CHECK(inside == 0);
  }
}

TEST_CASE("proof: open nodes come best first, and the last first once memory is short", "[proof][unit]") {
  proof::OpenNodes open;
  for (const double lower : {3.0, 1.0, 2.0, 1.0}) {
    proof::Node node;
    node.lower = lower;
    open.push(std::move(node));
  }
  const std::vector<proof::Node> first = open.pop(2);
  CHECK(first[0].number == 1);
  CHECK(first[1].number == 3);
  CHECK(open.lower() == 2.0);
  open.cut_above(1.5);
  CHECK(open.empty());
  open.limit(1, 10, 10);  // room for one
  for (const double lower : {1.0, 5.0, 4.0}) {
    proof::Node node;
    node.lower = lower;
    open.push(std::move(node));
  }
  CHECK(open.size() == 3);
  CHECK(open.lower() == 1.0);
  const std::vector<proof::Node> all = open.pop(3);
  CHECK(all[0].lower == 4.0);
  CHECK(all[1].lower == 5.0);
  CHECK(all[2].lower == 1.0);
}

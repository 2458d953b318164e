// The bound and its parts against brute force.

#include "proof/bound.hpp"
#include "proof/certified.hpp"
#include "proof/counts.hpp"
#include "proof/enumerate.hpp"
#include "proof/first_blocks.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Core>

#include <algorithm>
#include <bit>
#include <cmath>
#include <functional>
#include <limits>
#include <random>

using namespace formsieve;

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

double uniform(std::mt19937_64& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }

/// Actions of a random node: each predictor keeps each of its actions with probability 0.7, one at least.
std::vector<proof::Actions> random_node(std::mt19937_64& random, const proof::RootGram& root) {
  std::vector<proof::Actions> actions = root.all_actions();
  for (proof::Actions& mask : actions) {
    proof::Actions kept = 0;
    for (int bit = 0; bit < 64; ++bit)
      if ((mask >> bit & 1) != 0 && uniform(random) < 0.7) kept |= proof::Actions{1} << bit;
    if (kept != 0) mask = kept;
  }
  return actions;
}

proof::CountRange whole_range(const test::SmallSpace& small) {
  return {0, small.problem.penalty.size() - 1, 0, small.space.max_terms.value_or(small.space.predictors.size())};
}

/// The scores of a node's candidates.
std::vector<test::Scored> scores_of(const test::SmallSpace& small, const proof::Reduced& node,
                                    const std::vector<proof::Actions>& actions) {
  std::vector<test::Scored> kept;
  for (test::Scored& scored : test::score_all(small)) {
    bool inside = scored.choice.response == node.response;
    for (std::size_t j = 0; j < actions.size(); ++j)
      inside = inside && (actions[j] >> scored.choice.choice[j] & 1) != 0;
    if (inside) kept.push_back(scored);
  }
  return kept;
}

/// D of first_blocks with its off-diagonals and lengths disturbed, as far as it stays certified.
bool random_blocks(std::mt19937_64& random, const proof::Reduced& node, Eigen::MatrixXd& d,
                   proof::CertifiedDifference& z) {
  if (!proof::first_blocks(node, d)) return false;
  Eigen::MatrixXd disturbed = d * (0.2 + 0.8 * uniform(random));
  for (const proof::OpenPredictor& predictor : node.open)
    for (Eigen::Index a = predictor.first; a < predictor.first + predictor.n_columns; ++a)
      for (Eigen::Index b = predictor.first; b < a; ++b) {
        disturbed(a, b) += 0.02 * (uniform(random) - 0.5);
        disturbed(b, a) = disturbed(a, b);
      }
  if (z.certify(node, disturbed)) d = disturbed;
  return z.certify(node, d);
}

/// Calls visit(terms, columns, sum, actions) for every combination of the open predictors' actions.
using Visit = std::function<void(std::size_t, std::size_t, double, const std::vector<std::size_t>&)>;
void combinations(const proof::Reduced& node, const proof::Gains& gains, const Visit& visit) {
  std::vector<std::size_t> at(node.open.size(), 0);
  const auto n_actions = [&](std::size_t j) { return node.open[j].forms.size() + (node.open[j].must ? 0 : 1); };
  for (bool carried = false; !carried;) {
    std::size_t terms = 0;
    std::size_t columns = 0;
    double sum = 0.0;
    for (std::size_t j = 0; j < at.size(); ++j) {
      if (at[j] == node.open[j].forms.size()) continue;
      ++terms;
      columns += static_cast<std::size_t>(node.open[j].forms[at[j]].n_columns);
      sum += gains[j][at[j]];
    }
    visit(terms, columns, sum, at);
    carried = true;
    for (std::size_t j = 0; carried && j < at.size(); ++j) {
      at[j] = (at[j] + 1) % n_actions(j);
      carried = at[j] == 0;
    }
  }
}

}  // namespace

TEST_CASE("proof: bounds of nodes and actions lie below every candidate", "[proof][property]") {
  std::size_t bounded = 0;
  double closest = kInfinity;
  for (std::uint64_t seed = 1; seed <= 80; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 400);
    small.connect();
    std::mt19937_64 random(seed);
    const proof::RootGram root(small.problem);
    const std::vector<proof::Actions> actions = random_node(random, root);
    const proof::Reduced node = proof::reduce(root, seed % small.space.n_responses, actions);
    Eigen::MatrixXd d;
    proof::CertifiedDifference z;
    if (!node.separable || node.open.empty() || !random_blocks(random, node, d, z)) continue;
    const std::vector<test::Scored> scores = scores_of(small, node, actions);
    const proof::BoundEvaluator evaluator(root, node, whole_range(small));
    for (int trial = 0; trial < 5; ++trial) {
      Eigen::VectorXd v = Eigen::VectorXd::Zero(node.b.size());
      for (Eigen::Index i = 0; i < v.size(); ++i) v(i) = trial * 0.1 * (uniform(random) - 0.5);
      const proof::Bound bound = evaluator(proof::dual_value(node, z, d, v), kInfinity);
      for (const test::Scored& scored : scores) {
        INFO("seed " << seed << ", trial " << trial);
        CHECK(bound.lower <= scored.score + 1e-9);
        for (std::size_t j = 0; j < node.open.size(); ++j) {
          const proof::OpenPredictor& predictor = node.open[j];
          const std::uint16_t choice = scored.choice.choice[predictor.predictor];
          std::size_t action = predictor.forms.size();
          for (std::size_t f = 0; f < predictor.forms.size(); ++f)
            if (predictor.forms[f].form + 1 == choice) action = f;
          CHECK(bound.action[j][action] <= scored.score + 1e-9);
        }
        closest = std::min(closest, scored.score - bound.lower);
        ++bounded;
      }
    }
  }
  CHECK(bounded > 5000);
  CHECK(closest < 5.0);  // the bounds say something
}

TEST_CASE("proof: bounds above a threshold leave out only candidates above it", "[proof][property]") {
  for (std::uint64_t seed = 100; seed <= 140; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 400);
    small.connect();
    std::mt19937_64 random(seed);
    const proof::RootGram root(small.problem);
    const std::vector<proof::Actions> actions = root.all_actions();
    const proof::Reduced node = proof::reduce(root, 0, actions);
    Eigen::MatrixXd d;
    proof::CertifiedDifference z;
    if (!node.separable || node.open.empty() || !random_blocks(random, node, d, z)) continue;
    const std::vector<test::Scored> scores = scores_of(small, node, actions);
    if (scores.empty()) continue;
    const double threshold = scores[scores.size() / 3].score;
    const proof::BoundEvaluator evaluator(root, node, whole_range(small));
    const proof::Bound bound =
        evaluator(proof::dual_value(node, z, d, Eigen::VectorXd::Zero(node.b.size())), threshold);
    for (const test::Scored& scored : scores) {
      if (scored.score > threshold) continue;
      std::size_t columns = 0;
      for (std::size_t j = 0; j < scored.choice.choice.size(); ++j)
        if (scored.choice.choice[j] != 0)
          columns += small.space.predictors[j].forms[scored.choice.choice[j] - 1u].n_columns;
      CHECK(columns >= bound.fewest_columns);
      CHECK(columns <= bound.most_columns);
    }
  }
}

TEST_CASE("proof: the largest sums by columns and terms equal those over all combinations", "[proof][property]") {
  std::size_t by_terms = 0;
  for (std::uint64_t seed = 1; seed <= 120; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 300);
    small.connect();
    std::mt19937_64 random(seed);
    const proof::RootGram root(small.problem);
    const proof::Reduced node = proof::reduce(root, 0, random_node(random, root));
    if (node.open.empty()) continue;
    proof::Gains gains;
    for (const proof::OpenPredictor& predictor : node.open) {
      gains.emplace_back();
      for (std::size_t f = 0; f < predictor.forms.size(); ++f) gains.back().push_back(uniform(random));
    }
    proof::CountRange range = whole_range(small);
    range.fewest_terms = seed % 3;
    const proof::CountedSums counted(node, range);
    by_terms += counted.by_terms() ? 1 : 0;
    const proof::Sums sums = counted.all(gains);
    const std::vector<proof::Sums> others = counted.without_each(gains);
    proof::Sums expected = proof::Sums::Constant(sums.rows(), sums.cols(), -kInfinity);
    std::vector<proof::Sums> expected_others(node.open.size(), expected);
    combinations(node, gains, [&](std::size_t terms, std::size_t columns, double sum, const auto& at) {
      const auto row = static_cast<Eigen::Index>(counted.by_terms() ? terms : 0);
      const auto column = static_cast<Eigen::Index>(columns);
      if (row < sums.rows() && column < sums.cols()) expected(row, column) = std::max(expected(row, column), sum);
      for (std::size_t j = 0; j < at.size(); ++j) {
        const bool absent = at[j] == node.open[j].forms.size();
        if (!absent && at[j] != 0) continue;
        const Eigen::Index r = absent || !counted.by_terms() ? row : row - 1;
        const Eigen::Index c = absent ? column : column - node.open[j].forms[0].n_columns;
        const double rest = absent ? sum : sum - gains[j][0];
        if (r < sums.rows() && c < sums.cols()) expected_others[j](r, c) = std::max(expected_others[j](r, c), rest);
      }
    });
    const auto same = [](const proof::Sums& a, const proof::Sums& b) {
      return ((a == b) || (a - b).abs() < 1e-12).all();
    };
    INFO("seed " << seed);
    CHECK(same(sums, expected));
    for (std::size_t j = 0; j < others.size(); ++j) CHECK(same(others[j], expected_others[j]));
  }
  CHECK(by_terms > 5);
}

TEST_CASE("proof: a difference that is not positive definite is never certified", "[proof][unit]") {
  proof::Reduced node;
  node.m = Eigen::MatrixXd::Identity(4, 4);
  node.b = Eigen::VectorXd::Zero(4);
  proof::CertifiedDifference z;
  Eigen::MatrixXd d = Eigen::MatrixXd::Identity(4, 4);
  CHECK(!z.certify(node, d));  // zero is not positive definite
  d(2, 2) = 1.0 + 1e-15;
  CHECK(!z.certify(node, d));
  d = 0.5 * Eigen::MatrixXd::Identity(4, 4);
  CHECK(z.certify(node, d));
  // smallest eigenvalue −1e-14: within what rounding may hide
  Eigen::MatrixXd singular = Eigen::MatrixXd::Constant(4, 4, 1.0) - 1e-14 * Eigen::MatrixXd::Identity(4, 4);
  node.m = singular + d;
  CHECK(!z.certify(node, d));
  node.m = Eigen::MatrixXd::Identity(4, 4);
  node.entry_error = 0.2;  // entries so uncertain that nothing follows
  CHECK(!z.certify(node, d));
  d(0, 0) = std::numeric_limits<double>::quiet_NaN();
  CHECK(!z.certify(node, d));
}

TEST_CASE("proof: values at senseless points say nothing instead of too much", "[proof][unit]") {
  test::SmallSpace small = test::draw_small_space(2, 400);
  small.connect();
  const proof::RootGram root(small.problem);
  const proof::Reduced node = proof::reduce(root, 0, root.all_actions());
  Eigen::MatrixXd d;
  REQUIRE(proof::first_blocks(node, d));
  proof::CertifiedDifference z;
  REQUIRE(z.certify(node, d));
  const double best = test::score_all(small).front().score;
  const proof::BoundEvaluator evaluator(root, node, whole_range(small));
  for (const double bad : {std::numeric_limits<double>::quiet_NaN(), kInfinity, 1e200}) {
    const Eigen::VectorXd v = Eigen::VectorXd::Constant(node.b.size(), bad);
    CHECK(evaluator(proof::dual_value(node, z, d, v), kInfinity).lower <= best);
  }
  d(0, 0) = -1.0;  // no gain is bounded by it
  CHECK(evaluator(proof::dual_value(node, z, d, Eigen::VectorXd::Zero(node.b.size())), kInfinity).lower <= best);
}

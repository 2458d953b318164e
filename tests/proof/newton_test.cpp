// Newton's method on the dual of a node: bounds against brute force, optima against closed forms and a plain search.
#include "nodes.hpp"
#include "proof/newton.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>
#include <vector>

using namespace formsieve;

namespace {

using Shapes = std::vector<test::PredictorShape>;

/// Steps with μ falling from `start.mu` to `end` whenever the decrement is small; the number of steps, 0 on failure.
int run(proof::Newton& newton, double end, int most_steps = 400) {
  for (int i = 1; i <= most_steps; ++i) {
    const proof::Newton::Step step = newton.step();
    if (!step.usable) return 0;
    if (step.decrement > 1.0) continue;
    if (newton.mu() <= end) {
      if (step.decrement < 1e-3) return i;
      continue;
    }
    newton.set_mu(std::max(end, 0.3 * newton.mu()));
  }
  return 0;
}

bool is_symmetric(const Eigen::MatrixXd& matrix) { return matrix == matrix.transpose(); }

/// Some τ that is of interest: what the best candidates of the node reach, rising to fewer columns.
proof::ColumnRange some_range(const proof::Reduced& node) { return test::whole_range(node, 0.7, 0.04); }

}  // namespace

TEST_CASE("proof: a point stays inside the domain and improves in every Newton step", "[proof][property]") {
  const auto& shapes = GENERATE(Shapes{{{1, 1, 1}}, {{1, 1}, true}, {{1, 1, 1, 1}}, {{1}}, {{1, 1}}},
                                Shapes{{{2, 1}}, {{1, 1, 3}, true}, {{4}}, {{1}}, {{1, 2}}});
  const proof::Reduced node = test::make_node(GENERATE(1, 2, 3), 60, shapes, 0.2);
  const proof::ColumnRange range = some_range(node);
  proof::Newton newton(node, range, test::plain_start(node, 0.01, 0.05));
  for (int i = 0; i < 60; ++i) {
    const proof::Newton::Step step = newton.step();
    REQUIRE(step.usable);
    const proof::DualPoint point = newton.point();
    REQUIRE(std::isfinite(test::dual_value(node, range, point)));
    REQUIRE(point.lambda > 0.0);
    REQUIRE(is_symmetric(point.d));
    REQUIRE(((node.m - point.d) * point.v + point.g - node.b).norm() < 1e-8);
    if (step.decrement < 1.0) newton.set_mu(0.3 * newton.mu());
    if (newton.mu() < 1e-7) break;
  }
  CHECK(newton.mu() < 1e-6);
}

TEST_CASE("proof: the dual's value is a lower bound of every candidate of the node", "[proof][property]") {
  const auto& shapes = GENERATE(
      Shapes{{{1, 1, 1}}, {{1, 1}}, {{1, 1, 1}}, {{1, 1}}}, Shapes{{{1, 1, 1}, true}, {{1, 1}}, {{1, 1}, true}, {{1}}},
      Shapes{{{2, 1}}, {{1, 1, 3}}, {{2}}, {{1, 1}}}, Shapes{{{2, 1}, true}, {{1, 3}, true}, {{1, 1}}});
  const int seed = GENERATE(11, 12, 13);
  proof::Reduced node = test::make_node(seed, 30, shapes);
  node.fixed_columns = 2;  // which the range counts
  const proof::ColumnRange range = some_range(node);
  proof::Newton newton(node, range, test::plain_start(node, 0.01, 0.05));
  for (int i = 0; i < 80; ++i) {
    REQUIRE(newton.step().usable);
    const double value = test::dual_value(node, range, newton.point());
    REQUIRE(value <= test::smallest_excess(node, range) + 1e-10);
    if (i % 4 == 3) newton.set_mu(std::max(1e-8, 0.5 * newton.mu()));
  }
  // and not a poor one: these nodes are small
  CHECK(test::dual_value(node, range, newton.point()) > test::smallest_excess(node, range) - 0.1);
}

TEST_CASE("proof: the dual's optimum is the best candidate itself when the columns are orthogonal", "[proof][unit]") {
  proof::Reduced node = test::make_node(1, 20, Shapes(6, {{1}}));
  node.m.setIdentity();
  node.b << 0.5, -0.4, 0.3, 0.2, -0.1, 0.05;
  node.open[4].must = true;
  const std::size_t k = GENERATE(1, 2, 3, 5);
  // k of them, the fifth always: the k − 1 largest others
  double rss = 1.0 - 0.1 * 0.1;
  for (std::size_t i = 0, taken = 1; taken < k; ++i) {
    if (i == 4) continue;
    rss -= node.b(static_cast<Eigen::Index>(i)) * node.b(static_cast<Eigen::Index>(i));
    ++taken;
  }
  const proof::ColumnRange range{k, k, 0.3, 0.3};
  proof::Newton newton(node, range, test::plain_start(node, 0.05, 0.01));
  REQUIRE(run(newton, 1e-7) > 0);
  CHECK(test::dual_value(node, range, newton.point()) == Approx(rss - 0.3).margin(3e-6));
}

namespace {

/// Where a function of one variable that rises and then falls is largest, by golden section.
template <class Function>
double largest(double from, double to, const Function& function) {
  constexpr double kGolden = 0.6180339887498949;
  double left = to - kGolden * (to - from), right = from + kGolden * (to - from);
  double at_left = function(left), at_right = function(right);
  for (int i = 0; i < 45; ++i) {
    if (at_left < at_right) {
      from = left;
      left = right;
      at_left = at_right;
      at_right = function(right = from + kGolden * (to - from));
    } else {
      to = right;
      right = left;
      at_right = at_left;
      at_left = function(left = to - kGolden * (to - from));
    }
  }
  return std::max(at_left, at_right);
}

/// min over c of yy − 2bᵀc + cᵀ(M − D)c + Σ_j min over 0 ≤ z ≤ 1 of d_j c_j²/z + λz (z = 1 where the column must be
/// in), two columns: what the dual of fixed D and λ comes to, by descent in one coordinate after the other.
double relaxed_rss(const proof::Reduced& node, const Eigen::Vector2d& d, double lambda) {
  Eigen::Matrix2d z = node.m;
  z.diagonal() -= d;
  Eigen::Vector2d c(0.0, 0.0);
  double charges = 0.0;
  for (int sweep = 0; sweep < 80; ++sweep) {
    charges = 0.0;
    for (Eigen::Index j = 0; j < 2; ++j) {
      const double along = node.b(j) - z(j, 1 - j) * c(1 - j), root = std::sqrt(lambda * d(j));
      double size = std::max(0.0, (std::abs(along) - root) / z(j, j));
      const bool whole = node.open[static_cast<std::size_t>(j)].must || d(j) * size > root;
      if (whole) size = std::abs(along) / (z(j, j) + d(j));
      c(j) = std::copysign(size, along);
      charges += whole ? d(j) * size * size + lambda : 2.0 * root * size;
    }
  }
  return node.yy - 2.0 * node.b.dot(c) + c.dot(z * c) + charges;
}

/// The optimum of the dual of two columns: golden sections over λ, d_1 and d_2, one inside the other.
double searched_value(const proof::Reduced& node, const proof::ColumnRange& range) {
  const double m01 = node.m(0, 1) * node.m(0, 1);
  return largest(1e-6, 1.0, [&](double lambda) {
    const double s = std::max(static_cast<double>(range.fewest) * lambda + range.tau_fewest,
                              static_cast<double>(range.most) * lambda + range.tau_most);
    return largest(1e-9, 1.0 - m01 - 1e-9, [&](double d0) {
      return largest(1e-10, 1.0 - m01 / (1.0 - d0) - 1e-10, [&](double d1) {
        return relaxed_rss(node, {d0, d1}, lambda) - s;
      });
    });
  });
}

}  // namespace

TEST_CASE("proof: the dual's optimum of two columns is what a plain search finds", "[proof][unit]") {
  proof::Reduced node = test::make_node(1, 20, Shapes(2, {{1}}));
  node.m << 1.0, 0.6, 0.6, 1.0;
  node.b << 0.6, 0.5;
  node.open[0].must = GENERATE(false, true);
  const proof::ColumnRange range = GENERATE(proof::ColumnRange{1, 1, 0.5, 0.5}, proof::ColumnRange{1, 2, 0.6, 0.52});
  proof::Newton newton(node, range, test::plain_start(node, 0.05, 0.01));
  REQUIRE(run(newton, 1e-7) > 0);
  const double value = test::dual_value(node, range, newton.point());
  const double searched = searched_value(node, range);
  CHECK(value >= searched - 3e-6);
  CHECK(value <= searched + 1e-5);
}

TEST_CASE("proof: Newton's method converges when there are more columns than rows", "[proof][property]") {
  const proof::Reduced node = test::make_node(GENERATE(21, 22), 24, Shapes(8, {{1, 1, 1, 1}}), 0.2);
  const proof::ColumnRange range = some_range(node);
  proof::Newton newton(node, range, test::plain_start(node, 0.01, 0.02));
  const double before = test::dual_value(node, range, newton.point());
  CHECK(run(newton, 1e-5) > 0);
  CHECK(test::dual_value(node, range, newton.point()) > before);
}

TEST_CASE("proof: nearly equal forms do not break Newton's method", "[proof][property]") {
  const Shapes shapes = {{{1, 1, 1}}, {{1, 1, 1, 1}}, {{1, 1}, true}, {{2, 1}}, {{1, 1}}};
  const proof::Reduced node = test::make_node(GENERATE(31, 32, 33), 50, shapes, 1e-4);
  CHECK(1.0 - node.m(0, 1) < 3e-8);
  const proof::ColumnRange range = some_range(node);
  proof::Newton newton(node, range, test::plain_start(node, 0.01, 0.02));
  CHECK(run(newton, 1e-6) > 0);
  const double value = test::dual_value(node, range, newton.point());
  CHECK(value <= test::smallest_excess(node, range) + 1e-8);
  CHECK(value > test::smallest_excess(node, range) - 0.1);
}

TEST_CASE("proof: Newton's steps do not run into the boundary from a far start", "[proof][property]") {
  const proof::Reduced node = test::make_node(1, GENERATE(150, 300), Shapes(40, {{1, 1, 1, 1, 1, 1}}), 0.1);
  proof::ColumnRange range = test::whole_range(node, 0.5, 0.02);
  range.fewest = 13;
  range.most = 19;
  range.tau_most = 0.5 * std::exp(-0.02 * 6.0);
  const double lambda = (range.tau_fewest - range.tau_most) / 6.0, unit = lambda / 240.0;
  proof::Newton newton(node, range, test::plain_start(node, lambda, 200.0 * unit));
  CHECK(run(newton, 0.3 * unit, 80) > 0);
}

TEST_CASE("proof: Newton's method goes on when nothing is left to decide about the number of columns",
          "[proof][unit]") {
  const proof::Reduced node = test::make_node(7, 40, Shapes(4, {{1, 1, 1}, true}));
  const proof::ColumnRange range = some_range(node);
  REQUIRE(range.fewest == range.most);
  proof::Newton newton(node, range, test::plain_start(node, 0.01, 0.02));
  CHECK(run(newton, 1e-7) > 0);
  CHECK(test::dual_value(node, range, newton.point()) <= test::smallest_excess(node, range));
}

TEST_CASE("proof: a Newton step from outside the domain says so and leaves the point", "[proof][unit]") {
  const proof::Reduced node = test::make_node(8, 40, Shapes(3, {{1, 1}}));
  proof::DualPoint start = test::plain_start(node, 0.01, 0.02);
  SECTION("M − D is not positive definite") { start.d.diagonal().array() += 1.0; }
  SECTION("a D_ff is not positive") { start.d(2, 2) = -1e-3; }
  SECTION("the price is not positive") { start.lambda = 0.0; }
  SECTION("the weight of the barrier is not positive") { start.mu = 0.0; }
  SECTION("a value is not a number") { start.g(1) = std::nan(""); }
  proof::Newton newton(node, some_range(node), start);
  const proof::Newton::Step step = newton.step();
  CHECK_FALSE(step.usable);
  const proof::DualPoint after = newton.point();
  CHECK(after.d == start.d);
  CHECK(after.lambda == start.lambda);
  CHECK(after.g.cwiseEqual(start.g).count() >= start.g.size() - 1);
}

TEST_CASE("proof: a Newton step beyond the precision of the numbers leaves the point", "[proof][unit]") {
  const proof::Reduced node = test::make_node(9, 40, Shapes(3, {{1, 1}}));
  proof::Newton newton(node, some_range(node), test::plain_start(node, 0.01, 1e-2));
  proof::DualPoint before = newton.point();
  for (int i = 0; i < 400 && newton.step().usable; ++i) {
    before = newton.point();
    newton.set_mu(0.1 * newton.mu());
  }
  if (newton.step().usable) return;
  CHECK(newton.point().d == before.d);
  CHECK(newton.point().g == before.g);
}

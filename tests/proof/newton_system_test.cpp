// The Newton system against differences of the merit, and its solution against a plain dense solution.
#include "nodes.hpp"
#include "plain_newton.hpp"
#include "proof/newton.hpp"
#include "proof/newton_solve.hpp"
#include "proof/newton_system.hpp"
#include "targets.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Cholesky>

#include <cmath>
#include <random>
#include <utility>
#include <vector>

using namespace formsieve;

namespace {

/// A node with a point inside its domain, away from any centre.
struct Setting {
  Setting(const std::vector<test::PredictorShape>& shapes, std::uint64_t seed, double mu_)
      : node(test::make_node(seed, 40, shapes)),
        prices(node, test::whole_range(node, 0.8, 0.05), 0.02),
        system(node),
        mu(mu_) {
    const proof::DualPoint start = test::plain_start(node, 0.02, mu);
    std::mt19937_64 random(seed);
    std::uniform_real_distribution<double> uniform(-1.0, 1.0);
    at.d = start.d;
    at.g = Eigen::VectorXd::NullaryExpr(node.b.size(), [&] { return 0.03 * uniform(random); });
    at.u.setZero(static_cast<Eigen::Index>(node.open.size()));
    at.lambda = 0.02;
    REQUIRE(proof::centre(node, prices, mu, at));
    at.u.array() += 0.004;
    at.s += 0.01;
    REQUIRE(std::isfinite(proof::merit(node, prices, mu, at, factor)));
    REQUIRE(system.build(at, factor, prices, mu));
    find_slots();
    REQUIRE(slots.size() == proof::Newton::n_variables(node));
  }

  Eigen::Index n_variables() const { return static_cast<Eigen::Index>(slots.size()); }
  Eigen::VectorXd unit(Eigen::Index i) const { return Eigen::VectorXd::Unit(n_variables(), i); }

  /// Of the variables that the padding of the lanes leaves.
  proof::Lines in_lanes(const Eigen::VectorXd& values) const {
    proof::Lines lines(system.lanes().n_lines());
    for (Eigen::Index i = 0; i < values.size(); ++i) *slot(lines, i) = values(i);
    return lines;
  }
  Eigen::VectorXd from_lanes(const proof::Lines& lines) const {
    return Eigen::VectorXd::NullaryExpr(n_variables(), [&](Eigen::Index i) { return *slot(lines, i); });
  }
  template <class LinesType>
  auto slot(LinesType& lines, Eigen::Index i) const -> decltype(&lines[0].at[0]) {
    const auto [line, lane] = slots[static_cast<std::size_t>(i)];
    return &lines[line].at[lane];
  }

  /// The merit at a displacement in the variables of the system.
  double merit_at(const Eigen::VectorXd& displacement) {
    proof::Variables direction = at, moved = at;
    proof::Factor unused;
    system.expand(in_lanes(displacement), direction);
    moved.set_along(at, 1.0, direction, node);
    return proof::merit(node, prices, mu, moved, unused);
  }

  Eigen::MatrixXd dense() {
    Eigen::MatrixXd matrix(n_variables(), n_variables());
    proof::Lines column(system.lanes().n_lines());
    for (Eigen::Index i = 0; i < matrix.cols(); ++i) {
      system.multiply(in_lanes(unit(i)), column);
      matrix.col(i) = from_lanes(column);
      CHECK((in_lanes(matrix.col(i)) == column));  // the padding stays zero
    }
    return matrix;
  }

  void find_slots() {
    const proof::Lanes& lanes = system.lanes();
    for (const proof::LanePlace& place : lanes.places()) {
      const proof::LaneGroup& group = lanes.groups()[place.group];
      for (std::size_t i = 0; i < place.n_columns; ++i) {
        for (std::size_t k = i; k < place.n_columns; ++k)
          slots.emplace_back(group.first + proof::upper_index(i, k, group.n_columns), place.lane);
        slots.emplace_back(group.w_line() + i, place.lane);
      }
      slots.emplace_back(group.u_line(), place.lane);
    }
    slots.emplace_back(lanes.prices_line(), proof::kLambdaLane);
    slots.emplace_back(lanes.prices_line(), proof::kSLane);
  }

  proof::Reduced node;
  proof::Prices prices;
  proof::NewtonSystem system;
  proof::Variables at;
  proof::Factor factor;
  double mu;
  std::vector<std::pair<std::size_t, std::size_t>> slots;  ///< line and lane of every variable
};

const std::vector<test::PredictorShape> kMixed = {{{1, 1}}, {{2, 1}, true}, {{1, 3, 1}}, {{1}}, {{1, 1, 1}, true}};
const std::vector<test::PredictorShape> kMany = {{{1, 1}},    {{1, 1, 1}}, {{1}},          {{2, 1}, true},
                                                 {{1, 1}},    {{1}},       {{1, 1, 1, 1}}, {{1, 1}},
                                                 {{1}, true}, {{1, 1, 1}}, {{1}},          {{1, 1}}};
const std::vector<test::PredictorShape> kPlain = {{{1, 1, 1}}, {{1, 1}}, {{1}, true}, {{1, 1, 1, 1}}};

/// A length at which the merit changes by a small part of μ in a variable with this curvature.
double small_step(double curvature, double mu) { return 0.003 * std::sqrt(mu / curvature); }

}  // namespace

TEST_CASE("proof: the slope of the merit equals differences when forms have one or several columns", "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain, kMany);
  test::on_every_target([&] {
    Setting setting(shapes, 3, 0.004);
    const Eigen::VectorXd curvature = setting.dense().diagonal(),
                          gradient = setting.from_lanes(setting.system.gradient());
    for (Eigen::Index i = 0; i < setting.n_variables(); ++i) {
      const double h = small_step(curvature(i), setting.mu);
      const double difference =
          (setting.merit_at(h * setting.unit(i)) - setting.merit_at(-h * setting.unit(i))) / (2.0 * h);
      INFO("variable " << i);
      CHECK(gradient(i) == Approx(difference).epsilon(1e-4).margin(1e-4 * std::sqrt(curvature(i) * 0.004)));
    }
  });
}

TEST_CASE("proof: the curvature of the merit equals differences when forms have one or several columns",
          "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain, kMany);
  Setting setting(shapes, 4, 0.004);
  const Eigen::MatrixXd dense = setting.dense();
  CHECK((dense - dense.transpose()).norm() < 1e-12 * dense.norm());
  const double here = setting.merit_at(Eigen::VectorXd::Zero(dense.rows()));
  for (Eigen::Index i = 0; i < dense.rows(); ++i)
    for (Eigen::Index k = 0; k <= i; ++k) {
      const Eigen::VectorXd a = small_step(dense(i, i), setting.mu) * setting.unit(i);
      const Eigen::VectorXd b = small_step(dense(k, k), setting.mu) * setting.unit(k);
      const double both = setting.merit_at(a + b) + setting.merit_at(-a - b) - 2.0 * here;
      const double apart = setting.merit_at(a - b) + setting.merit_at(b - a) - 2.0 * here;
      const double scale = std::sqrt(dense(i, i) * dense(k, k));
      INFO("variables " << i << " and " << k);
      CHECK(-(both - apart) / (4.0 * a.norm() * b.norm()) / scale == Approx(dense(i, k) / scale).margin(2e-4));
    }
}

TEST_CASE("proof: conjugate gradients promise what a plain dense solution promises", "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain, kMany);
  const double mu = GENERATE(0.1, 1e-3, 1e-6);
  test::on_every_target([&] {
    Setting setting(shapes, 5, mu);
    const test::PlainSystem plain = test::plain_system(setting.node, setting.prices, mu, setting.at);
    const Eigen::LDLT<Eigen::MatrixXd> factor(plain.hessian);
    const Eigen::VectorXd step = factor.solve(plain.gradient);
    const double exact = plain.gradient.dot(step);
    proof::ConjugateGradients solver(setting.system);
    REQUIRE(solver.solve(setting.system));
    const Eigen::VectorXd gradient = setting.from_lanes(setting.system.gradient());
    CHECK(solver.decrement() == Approx(gradient.dot(setting.from_lanes(solver.solution()))));
    CHECK(solver.decrement() <= exact * (1.0 + 1e-6));
    CHECK(solver.decrement() >= 0.9 * exact);
  });
}

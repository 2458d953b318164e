// The Newton system against differences of the merit, and its solution against a plain dense solution.
#include "nodes.hpp"
#include "proof/newton_solve.hpp"
#include "proof/newton_system.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Cholesky>

#include <cmath>
#include <random>

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
  }

  Eigen::VectorXd unit(Eigen::Index i) const { return Eigen::VectorXd::Unit(system.n_variables(), i); }

  /// The merit at a displacement in the variables of the system.
  double merit_at(const Eigen::VectorXd& displacement) const {
    proof::Variables direction, moved = at;
    proof::Factor unused;
    system.expand(displacement, direction);
    moved.set_along(at, 1.0, direction, node);
    return proof::merit(node, prices, mu, moved, unused);
  }

  Eigen::MatrixXd dense() {
    Eigen::MatrixXd matrix(system.n_variables(), system.n_variables());
    Eigen::VectorXd column;
    for (Eigen::Index i = 0; i < matrix.cols(); ++i) {
      system.multiply(unit(i), column);
      matrix.col(i) = column;
    }
    return matrix;
  }

  proof::Reduced node;
  proof::Prices prices;
  proof::NewtonSystem system;
  proof::Variables at;
  proof::Factor factor;
  double mu;
};

const std::vector<test::PredictorShape> kMixed = {{{1, 1}}, {{2, 1}, true}, {{1, 3, 1}}, {{1}}, {{1, 1, 1}, true}};
const std::vector<test::PredictorShape> kPlain = {{{1, 1, 1}}, {{1, 1}}, {{1}, true}, {{1, 1, 1, 1}}};

/// A length at which the merit changes by a small part of μ in a variable with this curvature.
double small_step(double curvature, double mu) { return 0.003 * std::sqrt(mu / curvature); }

}  // namespace

TEST_CASE("proof: the slope of the merit equals differences when forms have one or several columns", "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain);
  Setting setting(shapes, 3, 0.004);
  const Eigen::VectorXd curvature = setting.dense().diagonal();
  for (Eigen::Index i = 0; i < setting.system.n_variables(); ++i) {
    const double h = small_step(curvature(i), setting.mu);
    const double difference =
        (setting.merit_at(h * setting.unit(i)) - setting.merit_at(-h * setting.unit(i))) / (2.0 * h);
    INFO("variable " << i);
    CHECK(setting.system.gradient()(i) ==
          Approx(difference).epsilon(1e-4).margin(1e-4 * std::sqrt(curvature(i) * 0.004)));
  }
}

TEST_CASE("proof: the curvature of the merit equals differences when forms have one or several columns",
          "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain);
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

TEST_CASE("proof: conjugate gradients promise what a dense solution promises", "[proof][unit]") {
  const auto& shapes = GENERATE(kMixed, kPlain);
  const double mu = GENERATE(0.1, 1e-3, 1e-6);
  Setting setting(shapes, 5, mu);
  const Eigen::LLT<Eigen::MatrixXd> factor(setting.dense());
  REQUIRE(factor.info() == Eigen::Success);
  const double exact = setting.system.gradient().dot(factor.solve(setting.system.gradient()));
  proof::ConjugateGradients solver;
  Eigen::VectorXd solution;
  REQUIRE(solver.solve(setting.system, solution));
  const double reached = setting.system.gradient().dot(solution);
  CHECK(reached <= exact * (1.0 + 1e-6));
  CHECK(reached >= 0.9 * exact);
}

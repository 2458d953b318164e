// Factorisations of dense matrices against Eigen's, on every instruction set that this processor has.
#include "proof/dense_kernel.hpp"
#include "targets.hpp"

#include <catch2/catch.hpp>

#include <Eigen/Cholesky>

#include <cmath>
#include <random>
#include <vector>

using namespace formsieve;

namespace {

Eigen::MatrixXd positive_definite(Eigen::Index n) {
  std::mt19937_64 random(static_cast<std::uint64_t>(n));
  std::normal_distribution<double> normal;
  const Eigen::MatrixXd x = Eigen::MatrixXd::NullaryExpr(n + 5, n, [&] { return normal(random); });
  return x.transpose() * x;
}

}  // namespace

TEST_CASE("proof: a dense factor and what follows from it equal Eigen's", "[proof][unit]") {
  const Eigen::Index n = GENERATE(1, 2, 7, 8, 9, 24, 31, 64, 77, 130);
  const Eigen::MatrixXd m = positive_definite(n);
  const Eigen::LLT<Eigen::MatrixXd> oracle(m);
  const Eigen::MatrixXd lower = oracle.matrixL();
  const Eigen::MatrixXd inverse = oracle.solve(Eigen::MatrixXd::Identity(n, n));
  test::on_every_target([&] {
    proof::PaddedMatrix factor, work, inverted;
    factor.set_lower(m);
    REQUIRE(proof::factor_lower(factor));
    const Eigen::MatrixXd reached = factor.matrix().triangularView<Eigen::Lower>();
    CHECK((reached - lower).norm() < 1e-12 * lower.norm());
    proof::invert_factored(factor, work, inverted);
    const Eigen::MatrixXd full = inverted.matrix().selfadjointView<Eigen::Lower>();
    CHECK((full - inverse).norm() < 1e-9 * inverse.norm());
    std::vector<proof::Line> right(factor.padded_order() / proof::kLineLanes);
    Eigen::Map<Eigen::VectorXd> x(right.data()->at, n);
    x.setLinSpaced(n, 1.0, 2.0);
    const Eigen::VectorXd expected = oracle.matrixL().solve(x);
    proof::solve_lower(factor, right.data()->at);
    CHECK((x - expected).norm() < 1e-9 * expected.norm());
    const Eigen::VectorXd back = oracle.matrixU().solve(x);
    proof::solve_transposed(factor, right.data()->at);
    CHECK((x - back).norm() < 1e-9 * back.norm());
  });
}

TEST_CASE("proof: a matrix that is not positive definite has no dense factor, and leaves no trace", "[proof][unit]") {
  proof::PaddedMatrix factor;
  Eigen::MatrixXd m = positive_definite(21);
  const Eigen::Index at = GENERATE(0, 5, 13, 20);
  const double value = GENERATE(-1.0, 0.0, std::nan(""));
  const double before = m(at, at);
  m(at, at) = value;
  test::on_every_target([&] {
    factor.set_lower(m);
    CHECK_FALSE(proof::factor_lower(factor));
  });
  m(at, at) = before;
  factor.set_lower(m);
  CHECK(proof::factor_lower(factor));
}

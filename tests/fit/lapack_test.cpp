// The fit beside LAPACK's own pivoted least squares (dgelsy, Debian liblapack 3.11.0) on random problems.
#include "fit/least_squares.hpp"

#include <catch2/catch.hpp>
#include <lapacke.h>

#include <algorithm>
#include <cmath>
#include <random>
#include <vector>

namespace {

using namespace formsieve;

Eigen::VectorXd lapack_fit(Eigen::MatrixXd x, Eigen::VectorXd y, const Eigen::VectorXd& weights) {
  if (weights.size() != 0) {
    const Eigen::VectorXd root = weights.cwiseSqrt();
    x = root.asDiagonal() * x;
    y = root.cwiseProduct(y);
  }
  std::vector<lapack_int> pivots(static_cast<std::size_t>(x.cols()), 0);
  lapack_int rank = 0;
  const lapack_int status = LAPACKE_dgelsy(
      LAPACK_COL_MAJOR, static_cast<lapack_int>(x.rows()), static_cast<lapack_int>(x.cols()), 1, x.data(),
      static_cast<lapack_int>(x.rows()), y.data(), static_cast<lapack_int>(y.size()), pivots.data(), 1e-15, &rank);
  REQUIRE(status == 0);
  REQUIRE(rank == x.cols());
  return y.head(x.cols());
}

}  // namespace

TEST_CASE("fit: coefficients agree with LAPACK on random problems", "[fit][reference]") {
  std::mt19937 generator(20261201);
  std::normal_distribution<double> normal;
  std::uniform_int_distribution<int> columns(2, 60);
  for (int problem = 0; problem < 60; ++problem) {
    const Eigen::Index p = problem < 20 ? 2 + problem % 5 : columns(generator);
    const Eigen::Index n = p + 1 + std::uniform_int_distribution<Eigen::Index>(0, 300)(generator);
    Eigen::MatrixXd x = Eigen::MatrixXd::Ones(n, p);
    Eigen::VectorXd y(n), w(n);
    for (Eigen::Index j = 1; j < p; ++j) {
      const double scale = std::pow(10.0, 2.0 * normal(generator));
      for (Eigen::Index i = 0; i < n; ++i) x(i, j) = scale * (3.0 + normal(generator));
    }
    for (Eigen::Index i = 0; i < n; ++i) {
      y(i) = 10.0 * normal(generator);
      w(i) = std::exp(normal(generator));
    }
    for (const Eigen::VectorXd& weights : {Eigen::VectorXd(), w}) {
      const Eigen::VectorXd theirs = lapack_fit(x, y, weights);
      const auto full = fit::least_squares(x, y, weights);
      const auto quick = fit::quick_fit(x, y, weights);
      REQUIRE(full.ok());
      REQUIRE(quick.ok());
      INFO("problem " << problem << ", n " << n << ", p " << p);
      // In units of each coefficient's standard error at sd 10: free of scale, and lenient only where the data are.
      const Eigen::VectorXd unit = full->se.cwiseMax(1e-300);
      CHECK(((full->coefficients - theirs).array() / unit.array()).abs().maxCoeff() < 1e-8);
      CHECK(((quick->coefficients - full->coefficients).array() / unit.array()).abs().maxCoeff() < 1e-9);
    }
  }
}

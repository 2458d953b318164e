#include "fit/least_squares.hpp"

#include <Eigen/LU>
#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <random>

namespace {

using namespace formsieve;
using Catch::Matchers::Contains;

const Eigen::VectorXd kUnweighted;

struct Problem {
  Eigen::MatrixXd x;
  Eigen::VectorXd y, weights;
};

Problem random_problem(Eigen::Index n, Eigen::Index p, unsigned seed, double offset = 2.0) {
  std::mt19937 generator(seed);
  std::normal_distribution<double> normal;
  Problem problem{Eigen::MatrixXd::Ones(n, p), Eigen::VectorXd(n), Eigen::VectorXd(n)};
  for (Eigen::Index i = 0; i < n; ++i) {
    for (Eigen::Index j = 1; j < p; ++j) problem.x(i, j) = offset + normal(generator);
    problem.y(i) = 1.0 + problem.x.row(i).sum() + normal(generator);
    problem.weights(i) = std::exp(normal(generator));
  }
  return problem;
}

double difference(const Eigen::VectorXd& a, const Eigen::VectorXd& b) { return (a - b).norm() / b.norm(); }

}  // namespace

TEST_CASE("fit: an intercept alone is the weighted mean", "[fit][unit]") {
  const Eigen::MatrixXd x = Eigen::MatrixXd::Ones(4, 1);
  const Eigen::VectorXd y = (Eigen::VectorXd(4) << 1, 2, 4, 9).finished();
  const Eigen::VectorXd w = (Eigen::VectorXd(4) << 1, 1, 2, 4).finished();
  const auto plain = fit::least_squares(x, y, kUnweighted);
  REQUIRE(plain.ok());
  CHECK(plain->coefficients(0) == 4.0);
  CHECK(plain->rss == 38.0);  // 9 + 4 + 0 + 25
  CHECK(plain->tss == 38.0);
  CHECK(plain->se(0) == Approx(std::sqrt(38.0 / 3.0 / 4.0)).epsilon(1e-14));
  CHECK(plain->leverage(2) == Approx(0.25).epsilon(1e-14));
  const auto weighted = fit::least_squares(x, y, w);
  REQUIRE(weighted.ok());
  CHECK(weighted->coefficients(0) == Approx(47.0 / 8.0).epsilon(1e-15));
  CHECK(weighted->leverage(3) == Approx(0.5).epsilon(1e-14));
  const auto quick = fit::quick_fit(x, y, w);
  REQUIRE(quick.ok());
  CHECK(quick->coefficients(0) == Approx(47.0 / 8.0).epsilon(1e-15));
}

TEST_CASE("fit: residuals are orthogonal to every whitened column", "[fit][property]") {
  for (const double offset : {0.0, 1e3, 1e6}) {
    const Problem problem = random_problem(200, 8, 11, offset);
    const auto fitted = fit::least_squares(problem.x, problem.y, problem.weights);
    REQUIRE(fitted.ok());
    const Eigen::VectorXd gradient = problem.x.transpose() * problem.weights.cwiseProduct(fitted->residuals);
    CHECK(gradient.cwiseAbs().maxCoeff() < 1e-11 * (1.0 + offset) * problem.weights.sum());
    CHECK((fitted->fitted + fitted->residuals - problem.y).cwiseAbs().maxCoeff() <
          1e-14 * problem.y.cwiseAbs().maxCoeff());
    CHECK(fitted->leverage.sum() == Approx(8.0).epsilon(1e-12));
    CHECK(fitted->rank == 8);
  }
}

TEST_CASE("fit: an integer weight equals that many copies of the row", "[fit][property]") {
  const Problem base = random_problem(30, 4, 5);
  Eigen::VectorXd w(30);
  for (Eigen::Index i = 0; i < 30; ++i) w(i) = static_cast<double>(1 + i % 3);
  const auto total = static_cast<Eigen::Index>(w.sum());
  Eigen::MatrixXd x(total, 4);
  Eigen::VectorXd y(total);
  for (Eigen::Index i = 0, at = 0; i < 30; ++i) {
    for (int copy = 0; copy < static_cast<int>(w(i)); ++copy, ++at) {
      x.row(at) = base.x.row(i);
      y(at) = base.y(i);
    }
  }
  const auto weighted = fit::least_squares(base.x, base.y, w);
  const auto copied = fit::least_squares(x, y, kUnweighted);
  REQUIRE(weighted.ok());
  REQUIRE(copied.ok());
  CHECK(difference(weighted->coefficients, copied->coefficients) < 1e-14);
  CHECK(weighted->rss == Approx(copied->rss).epsilon(1e-13));
  CHECK(weighted->tss == Approx(copied->tss).epsilon(1e-13));
}

TEST_CASE("fit: leverage gives the deleted residuals that refits without the row give", "[fit][property]") {
  const Problem problem = random_problem(25, 4, 7);
  const auto all = fit::least_squares(problem.x, problem.y, problem.weights);
  REQUIRE(all.ok());
  for (Eigen::Index row = 0; row < 25; ++row) {
    Eigen::VectorXd x_rest_y(24), w_rest(24);
    Eigen::MatrixXd x_rest(24, 4);
    for (Eigen::Index i = 0, at = 0; i < 25; ++i) {
      if (i == row) continue;
      x_rest.row(at) = problem.x.row(i);
      x_rest_y(at) = problem.y(i);
      w_rest(at++) = problem.weights(i);
    }
    const auto rest = fit::quick_fit(x_rest, x_rest_y, w_rest);
    REQUIRE(rest.ok());
    const double deleted = problem.y(row) - problem.x.row(row).dot(rest->coefficients);
    CHECK(all->residuals(row) / (1.0 - all->leverage(row)) == Approx(deleted).epsilon(1e-10));
  }
}

TEST_CASE("fit: covariance and HC3 equal their textbook products", "[fit][property]") {
  const Problem problem = random_problem(60, 5, 3);
  const auto fitted = fit::least_squares(problem.x, problem.y, problem.weights);
  REQUIRE(fitted.ok());
  const Eigen::MatrixXd xw = problem.weights.cwiseSqrt().asDiagonal() * problem.x;
  const Eigen::MatrixXd inverse = (xw.transpose() * xw).inverse();
  const Eigen::VectorXd whitened = problem.weights.cwiseSqrt().cwiseProduct(fitted->residuals);
  const Eigen::VectorXd deleted = whitened.array() / (1.0 - fitted->leverage.array());
  const Eigen::MatrixXd meat = xw.transpose() * deleted.array().square().matrix().asDiagonal() * xw;
  const Eigen::MatrixXd hc3 = inverse * meat * inverse;
  CHECK((fitted->covariance - fitted->sigma * fitted->sigma * inverse).norm() < 1e-11 * fitted->covariance.norm());
  CHECK(difference(fitted->se, fitted->covariance.diagonal().cwiseSqrt()) < 1e-14);
  CHECK(difference(fitted->se_robust, hc3.diagonal().cwiseSqrt()) < 1e-11);
}

TEST_CASE("fit: quick fit equals the full fit", "[fit][property]") {
  for (const Eigen::Index n : {10, 120, 256, 257, 1000}) {  // about the kernel's blocks of 256 rows
    const Problem problem = random_problem(n, 9, 31, 50.0);
    for (const Eigen::VectorXd& weights : {kUnweighted, problem.weights}) {
      const auto full = fit::least_squares(problem.x, problem.y, weights);
      const auto quick = fit::quick_fit(problem.x, problem.y, weights);
      REQUIRE(full.ok());
      REQUIRE(quick.ok());
      CHECK(difference(quick->coefficients, full->coefficients) < 1e-12);
      CHECK(difference(quick->residuals, full->residuals) < 1e-12);
    }
  }
}

TEST_CASE("fit: units of columns and response do not matter", "[fit][property]") {
  const Problem problem = random_problem(80, 4, 9);
  Eigen::MatrixXd x = problem.x;
  x.col(1) *= 1e-170;  // its square is no double
  x.col(2) *= 1e+160;
  const auto plain = fit::least_squares(problem.x, problem.y, kUnweighted);
  const auto scaled = fit::least_squares(x, 1e-12 * problem.y, kUnweighted);
  REQUIRE(plain.ok());
  REQUIRE(scaled.ok());
  CHECK(scaled->coefficients(1) == Approx(plain->coefficients(1) * 1e158).epsilon(1e-13));
  CHECK(scaled->coefficients(2) == Approx(plain->coefficients(2) * 1e-172).epsilon(1e-13));
  CHECK(scaled->se(2) == Approx(plain->se(2) * 1e-172).epsilon(1e-13));
  CHECK(scaled->se_robust(1) == Approx(plain->se_robust(1) * 1e158).epsilon(1e-12));
  CHECK(scaled->rss == Approx(plain->rss * 1e-24).epsilon(1e-12));
}

TEST_CASE("fit: a column far from zero keeps its digits", "[fit][property]") {
  // Whole numbers around 10¹²: the spread is exact, so the slope must be that of the column about zero.
  Problem problem = random_problem(50, 2, 13);
  for (Eigen::Index i = 0; i < 50; ++i) problem.x(i, 1) = static_cast<double>(i % 7);
  Eigen::MatrixXd far = problem.x;
  far.col(1).array() += 1e12;
  const auto near_fit = fit::least_squares(problem.x, problem.y, problem.weights);
  const auto far_fit = fit::least_squares(far, problem.y, problem.weights);
  const auto far_quick = fit::quick_fit(far, problem.y, problem.weights);
  REQUIRE(near_fit.ok());
  REQUIRE(far_fit.ok());
  REQUIRE(far_quick.ok());
  CHECK(far_fit->coefficients(1) == Approx(near_fit->coefficients(1)).epsilon(1e-13));
  CHECK(far_fit->se(1) == Approx(near_fit->se(1)).epsilon(1e-13));
  CHECK(far_fit->rss == Approx(near_fit->rss).epsilon(1e-13));
  CHECK(far_quick->coefficients(1) == Approx(near_fit->coefficients(1)).epsilon(1e-12));
  CHECK(difference(far_quick->residuals, near_fit->residuals) < 1e-12);
}

TEST_CASE("fit: as many rows as columns reproduces the response and states no error", "[fit][unit]") {
  const Problem problem = random_problem(4, 4, 21);
  const auto fitted = fit::least_squares(problem.x, problem.y, kUnweighted);
  REQUIRE(fitted.ok());
  CHECK(fitted->rss == 0.0);
  CHECK(fitted->residuals.cwiseAbs().maxCoeff() == 0.0);
  CHECK(fitted->fitted == problem.y);
  CHECK(std::isnan(fitted->sigma));
  CHECK(fitted->se.array().isNaN().all());
  CHECK(fitted->se_robust.array().isNaN().all());
  CHECK((problem.x * fitted->coefficients - problem.y).norm() < 1e-12 * problem.y.norm());
}

TEST_CASE("fit: data that lie on a line exactly have no residual variance", "[fit][unit]") {
  Eigen::MatrixXd x = Eigen::MatrixXd::Ones(12, 2);
  Eigen::VectorXd y(12);
  for (Eigen::Index i = 0; i < 12; ++i) {
    x(i, 1) = 0.1 * static_cast<double>(i);
    y(i) = 3.7 - 0.3 * x(i, 1);  // exact up to the rounding of y
  }
  const auto fitted = fit::least_squares(x, y, kUnweighted);
  REQUIRE(fitted.ok());
  CHECK(fitted->rss == 0.0);
  CHECK(fitted->sigma == 0.0);
  CHECK(fitted->se.isZero(0.0));
  CHECK(fitted->se_robust.isZero(0.0));
  CHECK(fitted->tss > 0.0);
  CHECK(fitted->coefficients(1) == Approx(-0.3).epsilon(1e-14));
  y(5) += 1e-13;  // one more than rounding
  const auto nearly = fit::least_squares(x, y, kUnweighted);
  REQUIRE(nearly.ok());
  CHECK(nearly->rss > 1e-27);
}

TEST_CASE("fit: a row that alone decides a coefficient leaves its HC3 undefined and the others alone", "[fit][unit]") {
  const Problem base = random_problem(40, 3, 17);
  Eigen::MatrixXd x = Eigen::MatrixXd::Zero(40, 4);
  x.leftCols(3) = base.x;
  x(7, 3) = 1.0;  // a level that occurs once
  const auto fitted = fit::least_squares(x, base.y, kUnweighted);
  REQUIRE(fitted.ok());
  CHECK(fitted->leverage(7) == Approx(1.0).epsilon(1e-14));
  CHECK(std::isnan(fitted->se_robust(3)));
  CHECK(std::isfinite(fitted->se(3)));
  Eigen::MatrixXd x_rest(39, 3);  // without row 7 the other coefficients and their HC3 are the same
  Eigen::VectorXd y_rest(39);
  for (Eigen::Index i = 0, at = 0; i < 40; ++i) {
    if (i == 7) continue;
    x_rest.row(at) = base.x.row(i);
    y_rest(at++) = base.y(i);
  }
  const auto rest = fit::least_squares(x_rest, y_rest, kUnweighted);
  REQUIRE(rest.ok());
  CHECK(difference(fitted->se_robust.head(3), rest->se_robust) < 1e-12);
}

TEST_CASE("fit: a design that the rows cannot support is refused with its column", "[fit][unit]") {
  Problem problem = random_problem(20, 5, 23);
  SECTION("fewer rows than columns") {
    const auto fitted = fit::least_squares(problem.x.topRows(4), problem.y.head(4), kUnweighted);
    REQUIRE_FALSE(fitted.ok());
    CHECK(fitted.error().kind == ErrorKind::data);
    CHECK_THAT(fitted.error().message, Contains("4 rows cannot determine 5 coefficients"));
  }
  SECTION("a column that does not vary") {
    problem.x.col(3).setConstant(0.1);
    const auto fitted = fit::least_squares(problem.x, problem.y, problem.weights);
    REQUIRE_FALSE(fitted.ok());
    CHECK_THAT(fitted.error().message, Contains("column 3 does not vary"));
    CHECK_FALSE(fit::quick_fit(problem.x, problem.y, problem.weights).ok());
  }
  SECTION("a column that varies by rounding alone") {
    problem.x.col(3).setConstant(0.3);
    problem.x(4, 3) = 0.1 + 0.2;
    CHECK_FALSE(fit::least_squares(problem.x, problem.y, problem.weights).ok());
    CHECK_FALSE(fit::quick_fit(problem.x, problem.y, problem.weights).ok());
  }
  SECTION("a sum of other columns") {
    problem.x.col(2) = 3.0 * problem.x.col(1) - 0.5 * problem.x.col(4);
    const auto fitted = fit::least_squares(problem.x, problem.y, problem.weights);
    REQUIRE_FALSE(fitted.ok());
    CHECK_THAT(fitted.error().message, Contains("linear combination"));
    CHECK_FALSE(fit::quick_fit(problem.x, problem.y, kUnweighted).ok());
  }
  SECTION("nearly a sum of other columns is allowed") {
    problem.x.col(2) = 3.0 * problem.x.col(1) - 0.5 * problem.x.col(4);
    problem.x(0, 2) += 1e-9;
    CHECK(fit::least_squares(problem.x, problem.y, problem.weights).ok());
  }
}

TEST_CASE("fit: values that are no numbers are refused with their place", "[fit][unit]") {
  Problem problem = random_problem(20, 3, 29);
  SECTION("design") {
    problem.x(6, 2) = std::numeric_limits<double>::infinity();
    const auto fitted = fit::least_squares(problem.x, problem.y, kUnweighted);
    REQUIRE_FALSE(fitted.ok());
    CHECK_THAT(fitted.error().where, Contains("row 7") && Contains("design column 2"));
    CHECK_FALSE(fit::quick_fit(problem.x, problem.y, kUnweighted).ok());
  }
  SECTION("response") {
    problem.y(0) = std::numeric_limits<double>::quiet_NaN();
    const auto fitted = fit::least_squares(problem.x, problem.y, kUnweighted);
    REQUIRE_FALSE(fitted.ok());
    CHECK_THAT(fitted.error().where, Contains("row 1"));
  }
  SECTION("weights") {
    problem.weights(2) = 0.0;
    const auto fitted = fit::least_squares(problem.x, problem.y, problem.weights);
    REQUIRE_FALSE(fitted.ok());
    CHECK_THAT(fitted.error().message, Contains("weight"));
    CHECK_THAT(fitted.error().where, Contains("row 3"));
  }
}

#include "fit/folded_fit.hpp"
#include "fit/least_squares.hpp"

#include <catch2/catch.hpp>

#include <random>

namespace {

using namespace formsieve;
using Catch::Matchers::Contains;

struct Problem {
  Eigen::MatrixXd x;
  Eigen::VectorXd y, weights;
  std::vector<std::uint32_t> fold_of;
};

/// Folds of unequal sizes in no order.
Problem random_problem(Eigen::Index n, Eigen::Index p, std::uint32_t n_folds, unsigned seed) {
  std::mt19937 generator(seed);
  std::normal_distribution<double> normal;
  Problem problem{Eigen::MatrixXd::Ones(n, p), Eigen::VectorXd(n), Eigen::VectorXd(n), {}};
  for (Eigen::Index i = 0; i < n; ++i) {
    for (Eigen::Index j = 1; j < p; ++j) problem.x(i, j) = 20.0 + std::exp(normal(generator));
    problem.y(i) = problem.x.row(i).sum() + normal(generator);
    problem.weights(i) = std::exp(normal(generator));
    const auto draw = static_cast<std::uint32_t>(generator());
    problem.fold_of.push_back(std::min(draw % n_folds, (draw / n_folds) % n_folds));
  }
  return problem;
}

/// The plain way: the rows of the other folds copied together and fitted. `beside`: a second fold to leave out.
Result<fit::Fit> refit_without(const Problem& problem, const Eigen::VectorXd& weights, std::uint32_t fold,
                               std::uint32_t beside) {
  std::vector<Eigen::Index> rows;
  for (std::size_t i = 0; i < problem.fold_of.size(); ++i) {
    if (problem.fold_of[i] != fold && problem.fold_of[i] != beside) rows.push_back(static_cast<Eigen::Index>(i));
  }
  Eigen::VectorXd w;
  if (weights.size() != 0) w = weights(rows);
  return fit::least_squares(problem.x(rows, Eigen::all), problem.y(rows), w);
}

Result<fit::Fit> refit_without(const Problem& problem, const Eigen::VectorXd& weights, std::uint32_t fold) {
  return refit_without(problem, weights, fold, fold);
}

double difference(const Eigen::VectorXd& a, const Eigen::VectorXd& b) { return (a - b).norm() / b.norm(); }

}  // namespace

TEST_CASE("fit: every fit without one fold equals the refit on the rows left", "[fit][property]") {
  for (const std::uint32_t n_folds : {2U, 5U, 10U}) {
    const Problem problem = random_problem(700, 6, n_folds, n_folds);
    for (const Eigen::VectorXd& weights : {Eigen::VectorXd(), problem.weights}) {
      const fit::FoldedFit folded(problem.x, problem.y, weights, problem.fold_of, n_folds);
      for (std::uint32_t fold = 0; fold < n_folds; ++fold) {
        const auto ours = folded.without(fold);
        const auto plain = refit_without(problem, weights, fold);
        REQUIRE(ours.ok());
        REQUIRE(plain.ok());
        CHECK(difference(ours->coefficients, plain->coefficients) < 1e-12);
        CHECK(ours->rss == Approx(plain->rss).epsilon(1e-12));
      }
      const auto all = folded.all();
      const auto plain = fit::least_squares(problem.x, problem.y, weights);
      REQUIRE(all.ok());
      CHECK(difference(all->coefficients, plain->coefficients) < 1e-12);
      CHECK(all->rss == Approx(plain->rss).epsilon(1e-12));
    }
  }
}

TEST_CASE("fit: every fit without two folds equals the refit on the rows left", "[fit][property]") {
  for (const std::uint32_t n_folds : {3U, 7U}) {
    const Problem problem = random_problem(500, 5, n_folds, 20 + n_folds);
    for (const Eigen::VectorXd& weights : {Eigen::VectorXd(), problem.weights}) {
      const fit::FoldedFit folded(problem.x, problem.y, weights, problem.fold_of, n_folds);
      for (std::uint32_t fold = 0; fold < n_folds; ++fold) {
        const auto ours = folded.without_each_beside(fold);
        REQUIRE(ours.ok());
        REQUIRE(ours->size() == n_folds);
        for (std::uint32_t beside = 0; beside < n_folds; ++beside) {
          const auto plain = refit_without(problem, weights, fold, beside);
          CHECK(difference((*ours)[beside].coefficients, plain->coefficients) < 1e-12);
          CHECK((*ours)[beside].rss == Approx(plain->rss).epsilon(1e-12));
        }
        CHECK((*ours)[fold].coefficients == folded.without(fold)->coefficients);
      }
    }
  }
}

TEST_CASE("fit: the inverse root of a training part gives its covariance and leverages", "[fit][property]") {
  const Problem problem = random_problem(300, 5, 4, 31);
  for (const Eigen::VectorXd& weights : {Eigen::VectorXd(), problem.weights}) {
    const fit::FoldedFit folded(problem.x, problem.y, weights, problem.fold_of, 4);
    for (std::uint32_t fold = 0; fold < 4; ++fold) {
      const auto plain = refit_without(problem, weights, fold);
      const Eigen::MatrixXd inverse = plain->covariance / (plain->sigma * plain->sigma);
      const Eigen::MatrixXd root = *folded.inverse_root_without(fold);
      CHECK((root * root.transpose() - inverse).norm() < 1e-11 * inverse.norm());
    }
    const auto whole = fit::least_squares(problem.x, problem.y, weights);
    const Eigen::MatrixXd root = *folded.inverse_root_of_all();
    for (Eigen::Index i = 0; i < 300; ++i) {
      const double weight = weights.size() == 0 ? 1.0 : weights(i);
      CHECK(weight * (root.transpose() * problem.x.row(i).transpose()).squaredNorm() ==
            Approx(whole->leverage(i)).epsilon(1e-11));
    }
  }
}

TEST_CASE("fit: a fold without rows leaves the fit on all of them", "[fit][unit]") {
  Problem problem = random_problem(40, 3, 2, 8);
  for (auto& fold : problem.fold_of) fold = fold == 1 ? 2 : 0;  // fold 1 stays empty
  const fit::FoldedFit folded(problem.x, problem.y, problem.weights, problem.fold_of, 3);
  REQUIRE(folded.without(1).ok());
  CHECK(difference(folded.without(1)->coefficients, folded.all()->coefficients) < 1e-14);
}

TEST_CASE("fit: a training part that cannot support the design is refused, the others are not", "[fit][unit]") {
  Problem problem = random_problem(60, 4, 3, 12);
  const fit::FoldedFit whole(problem.x, problem.y, problem.weights, problem.fold_of, 3);
  SECTION("a level that occurs in one fold only") {
    for (Eigen::Index i = 0; i < 60; ++i) {
      problem.x(i, 2) = problem.fold_of[static_cast<std::size_t>(i)] == 1 && i % 2 == 0 ? 1.0 : 0.0;
    }
    for (const Eigen::VectorXd& weights : {Eigen::VectorXd(), problem.weights}) {
      const fit::FoldedFit folded(problem.x, problem.y, weights, problem.fold_of, 3);
      REQUIRE_FALSE(folded.without(1).ok());
      CHECK_THAT(folded.without(1).error().message, Contains("column 2 does not vary"));
      CHECK(folded.without(0).ok());
    }
  }
  SECTION("a constant far from the mean of all rows") {
    for (Eigen::Index i = 0; i < 60; ++i) {
      if (problem.fold_of[static_cast<std::size_t>(i)] != 0) problem.x(i, 1) = 1e6 / 3.0;
    }
    const fit::FoldedFit folded(problem.x, problem.y, problem.weights, problem.fold_of, 3);
    CHECK_FALSE(folded.without(0).ok());
    CHECK(folded.without(2).ok());
  }
  SECTION("two columns that differ in one fold only") {
    for (Eigen::Index i = 0; i < 60; ++i) {
      if (problem.fold_of[static_cast<std::size_t>(i)] != 2) problem.x(i, 3) = 2.0 * problem.x(i, 1) - 7.0;
    }
    const fit::FoldedFit folded(problem.x, problem.y, problem.weights, problem.fold_of, 3);
    REQUIRE_FALSE(folded.without(2).ok());
    CHECK_THAT(folded.without(2).error().message, Contains("linear combination"));
    CHECK(folded.without(1).ok());
  }
  SECTION("fewer rows than columns") {
    const fit::FoldedFit folded(problem.x.topRows(6), problem.y.head(6), Eigen::VectorXd(),
                                std::vector<std::uint32_t>{0, 0, 0, 1, 1, 1}, 2);
    REQUIRE_FALSE(folded.without(0).ok());
    CHECK_THAT(folded.without(0).error().message, Contains("3 rows cannot determine 4 coefficients"));
  }
  SECTION("a value that is no number") {
    problem.x(3, 1) = std::numeric_limits<double>::quiet_NaN();
    const fit::FoldedFit folded(problem.x, problem.y, problem.weights, problem.fold_of, 3);
    CHECK_FALSE(folded.without(0).ok());
    CHECK_FALSE(folded.all().ok());
  }
}

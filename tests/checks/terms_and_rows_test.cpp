#include "checks/deletion.hpp"
#include "checks/separable_terms.hpp"
#include "checks/workings.hpp"
#include "support.hpp"

#include <Eigen/LU>

#include <catch2/catch.hpp>

#include <cmath>

namespace formsieve::checks {

namespace {

const Eigen::VectorXd kNoWeights(0);

/// Correlation matrix of the columns but the intercept.
Eigen::MatrixXd correlations(const Eigen::MatrixXd& x) {
  Eigen::MatrixXd c = x.rightCols(x.cols() - 1);
  c.rowwise() -= c.colwise().mean();
  c.colwise().normalize();
  return c.transpose() * c;
}

/// GVIF = det R₁₁ · det R₂₂ / det R as Fox & Monette 1992 write it, for the block of `columns` from `first`.
double gvif_by_determinants(const Eigen::MatrixXd& r, Eigen::Index first, Eigen::Index columns) {
  std::vector<Eigen::Index> inside;
  std::vector<Eigen::Index> others;
  for (Eigen::Index j = 0; j < r.cols(); ++j) (j >= first && j < first + columns ? inside : others).push_back(j);
  const double numerator = r(inside, inside).determinant() * r(others, others).determinant();
  return numerator / r.determinant();
}

}  // namespace

TEST_CASE("checks: inflation of two columns is 1/(1 − r²)", "[checks][unit]") {
  // x1 = 1 2 3 4, x2 = 1 3 2 4: r = 0.8, inflation 1/0.36
  Eigen::MatrixXd x(4, 3);
  x << 1, 1, 1, 1, 2, 3, 1, 3, 2, 1, 4, 4;
  const auto both = inflations(centred_basis(x, kNoWeights), std::vector<std::size_t>{1, 2});
  CHECK(both[0] == Approx(1.0 / 0.36).epsilon(1e-13));
  CHECK(both[1] == Approx(1.0 / 0.36).epsilon(1e-13));
}

TEST_CASE("checks: inflation of terms of several columns is the determinant ratio to the power 1/df",
          "[checks][property]") {
  Normals normals(21);
  Eigen::MatrixXd x = normals.design(60, 7);
  x.col(4) = x.col(1) + 0.3 * x.col(4);
  x.col(6) = x.col(5).array().square();
  const Eigen::MatrixXd r = correlations(x);
  const auto ours = inflations(centred_basis(x, kNoWeights), std::vector<std::size_t>{1, 2, 5});  // 1, 3, 2 columns
  REQUIRE(ours.size() == 3);
  CHECK(ours[0] == Approx(gvif_by_determinants(r, 0, 1)).epsilon(1e-10));
  CHECK(ours[1] == Approx(std::cbrt(gvif_by_determinants(r, 1, 3))).epsilon(1e-10));
  CHECK(ours[2] == Approx(std::sqrt(gvif_by_determinants(r, 4, 2))).epsilon(1e-10));
}

TEST_CASE("checks: inflation of a term does not depend on how its columns are written", "[checks][property]") {
  Normals normals(22);
  Eigen::MatrixXd x = normals.design(50, 5);
  x.col(3) += 0.8 * x.col(1);
  Eigen::MatrixXd rotated = x;
  rotated.col(1) = 3.0 * x.col(1) - x.col(2);
  rotated.col(2) = x.col(1) + 5.0 * x.col(2);
  const std::vector<std::size_t> terms{1, 3, 4};
  const auto a = inflations(centred_basis(x, kNoWeights), terms);
  const auto b = inflations(centred_basis(rotated, kNoWeights), terms);
  for (std::size_t j = 0; j < a.size(); ++j) CHECK(a[j] == Approx(b[j]).epsilon(1e-11));
}

TEST_CASE("checks: separable-terms fails on a near-duplicate and names it", "[checks][unit]") {
  Normals normals(23);
  Eigen::MatrixXd x = normals.design(80, 4);
  x.col(3) = x.col(2) + 0.05 * x.col(3);
  Fitted fit = fit_by_long_double(x, normals.vector(80));
  fit.term_names = {"throughput", "ln(area)", "volume"};
  const Check check = check_named(run_all(fit.subject()), "separable-terms");
  CHECK_FALSE(check.passes);
  CHECK(check.size > 100.0);
  CHECK(check.statistic.value() == check.size);
  CHECK_THAT(check.size_words, Catch::Contains("ln(area)") || Catch::Contains("volume"));
  CHECK_FALSE(check.p);
}

TEST_CASE("checks: separable-terms is 1 for a single term of several columns", "[checks][unit]") {
  Normals normals(24);
  Fitted fit = fit_by_long_double(normals.design(30, 4), normals.vector(30));
  fit.term_first = {1};
  fit.term_names = {"quadratic(x)"};
  const Check check = check_named(run_all(fit.subject()), "separable-terms");
  CHECK(check.statistic.value() == 1.0);
  CHECK(check.passes);
}

TEST_CASE("checks: Cook distance and prediction change equal refits without the row", "[checks][property]") {
  Normals normals(31);
  const Eigen::Index n = 15;
  const Eigen::MatrixXd x = normals.design(n, 3);
  const Eigen::VectorXd y = x.col(1) + normals.vector(n);
  const Eigen::VectorXd weights = normals.vector(n).array().exp();
  for (const bool weighted : {false, true}) {
    const Eigen::VectorXd w = weighted ? weights : Eigen::VectorXd::Ones(n);
    const Fitted fit = fit_by_long_double(x, y, weighted ? weights : kNoWeights);
    const Eigen::VectorXd cooks = cook_distances(fit.subject());
    Eigen::Index worst = 0;
    cooks.maxCoeff(&worst);
    const Check check = check_named(run_all(fit.subject()), "no-single-row");
    for (Eigen::Index row = 0; row < n; ++row) {
      Eigen::VectorXd without = w;
      without[row] = 1e-30;  // as good as left out, and the row keeps its prediction
      const Fitted refit = fit_by_long_double(x, y, without);
      const Eigen::VectorXd change = (fit.fitted - refit.fitted).cwiseProduct(w.cwiseSqrt()) / fit.sigma;
      CHECK(cooks[row] == Approx(change.squaredNorm() / 3.0).epsilon(1e-9));
      if (row == worst) CHECK(check.size == Approx(change.lpNorm<Eigen::Infinity>()).epsilon(1e-9));
    }
    CHECK(check.size2.value() == cooks.maxCoeff());
  }
}

TEST_CASE("checks: no-single-row fails when a coefficient rests on one row", "[checks][unit]") {
  Normals normals(32);
  Eigen::MatrixXd x = normals.design(20, 3);
  x.col(2).setZero();
  x(4, 2) = 1.0;
  const Check check = check_named(run_all(fit_by_long_double(x, normals.vector(20)).subject()), "no-single-row");
  CHECK_FALSE(check.passes);
  CHECK_THAT(check.note, Catch::Contains("row 5 of the rows in use has leverage 1"));
  CHECK(std::isfinite(check.statistic.value()));
  CHECK(std::isfinite(check.size));
}

}  // namespace formsieve::checks

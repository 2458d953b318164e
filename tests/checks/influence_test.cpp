// Influence of single rows: every figure beside an explicit refit without the row.

#include "checks/influence.hpp"

#include "checks/deletion.hpp"
#include "checks/leave_out.hpp"
#include "checks/workings.hpp"
#include "support.hpp"

#include <Eigen/Cholesky>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>

namespace formsieve::checks {

namespace {

std::vector<fit::Coefficient> named_coefficients(const Fitted& fit) {
  std::vector<fit::Coefficient> result{{"intercept", fit.coefficients[0], 0.0, 0.0}};
  for (std::size_t j = 0; j < fit.term_names.size(); ++j)
    result.push_back({fit.term_names[j], fit.coefficients[static_cast<Eigen::Index>(j) + 1], 0.0, 0.0});
  return result;
}

/// The same problem fitted without one row.
Fitted without(const Fitted& fit, Eigen::Index row) {
  std::vector<Eigen::Index> kept(static_cast<std::size_t>(fit.x.rows()));
  std::iota(kept.begin(), kept.end(), Eigen::Index{0});
  kept.erase(kept.begin() + row);
  const Eigen::VectorXd weights = fit.weights.size() > 0 ? Eigen::VectorXd(fit.weights(kept)) : fit.weights;
  return fit_by_long_double(fit.x(kept, Eigen::all), fit.y(kept), weights);
}

double rss_of(const Fitted& fit) { return fit.sigma * fit.sigma * static_cast<double>(fit.x.rows() - fit.x.cols()); }

/// Classical standard errors by the normal equations, which these small designs allow.
Eigen::VectorXd standard_errors(const Fitted& fit) {
  const Eigen::VectorXd w = fit.weights.size() > 0 ? fit.weights : Eigen::VectorXd::Ones(fit.x.rows());
  const Eigen::MatrixXd inner = fit.x.transpose() * w.asDiagonal() * fit.x;
  const Eigen::MatrixXd inverse = inner.llt().solve(Eigen::MatrixXd::Identity(inner.rows(), inner.cols()));
  return fit.sigma * inverse.diagonal().cwiseSqrt();
}

Fitted problem(unsigned long long seed, bool weighted) {
  Normals normals(seed);
  const Eigen::Index n = 25;
  Eigen::MatrixXd x = normals.design(n, 4);
  x.col(1).array() = 500.0 + 20.0 * x.col(1).array();  // far from zero
  x.col(3) += 0.9 * x.col(2);
  const Eigen::VectorXd weights = normals.vector(n).array().exp();
  Eigen::VectorXd y = 0.1 * x.col(1) + x.col(2) + normals.vector(n);
  y[3] += 6.0;
  return fit_by_long_double(x, y, weighted ? weights : Eigen::VectorXd(0));
}

}  // namespace

TEST_CASE("checks: deletion formulas equal refits without each row", "[checks][property]") {
  for (const bool weighted : {false, true}) {
    const Fitted fit = problem(71, weighted);
    const Subject subject = fit.subject();
    const Workings workings = prepare(subject);
    const Eigen::MatrixXd root = inverse_root(workings);
    const Eigen::VectorXd w = weighted ? fit.weights : Eigen::VectorXd::Ones(fit.x.rows());
    const Eigen::VectorXd se = standard_errors(fit);
    CHECK((fit.sigma * root.rowwise().norm() - se).cwiseQuotient(se).lpNorm<Eigen::Infinity>() < 1e-8);
    const Eigen::VectorXd rss = rss_without(subject);
    const Eigen::VectorXd studentised = externally_studentised(subject);
    for (Eigen::Index row = 0; row < fit.x.rows(); ++row) {
      const Fitted refit = without(fit, row);
      CHECK(rss[row] == Approx(rss_of(refit)).epsilon(1e-11));
      const double t = fit.residuals[row] * std::sqrt(w[row]) / (refit.sigma * std::sqrt(1.0 - fit.leverage[row]));
      CHECK(studentised[row] == Approx(t).epsilon(1e-10));
      const Eigen::VectorXd moves = (refit.coefficients - fit.coefficients).cwiseQuotient(se);
      CHECK((coefficient_moves_se(workings, root, row) - moves).lpNorm<Eigen::Infinity>() < 1e-9);
      const Eigen::VectorXd change = (fit.x * (refit.coefficients - fit.coefficients)).cwiseProduct(w.cwiseSqrt());
      CHECK(largest_prediction_change(workings, row) ==
            Approx(change.lpNorm<Eigen::Infinity>() / fit.sigma).epsilon(1e-9));
    }
  }
}

TEST_CASE("checks: influence lists the rows that matter with the figures of refits without them",
          "[checks][property]") {
  for (const bool weighted : {false, true}) {
    const Fitted fit = problem(72, weighted);
    const auto coefficients = named_coefficients(fit);
    std::vector<std::size_t> lines(25);
    for (std::size_t i = 0; i < lines.size(); ++i) lines[i] = 2 * i + 1;
    Subject subject = fit.subject();
    subject.lines = lines;
    const Influence found = influence(subject, coefficients);
    REQUIRE(found.rows.size() >= kByCook);
    REQUIRE(found.rows.size() <= kMostInfluential);
    CHECK(found.largest_leverage == fit.leverage.maxCoeff());
    CHECK(found.robust.empty());
    const Eigen::VectorXd cooks = cook_distances(fit.subject());
    CHECK(found.rows.front().cook == cooks.maxCoeff());
    const Eigen::VectorXd se = standard_errors(fit);
    for (const InfluentialRow& one : found.rows) {
      const auto row = static_cast<Eigen::Index>(one.row);
      const Fitted refit = without(fit, row);
      CHECK(one.line == 2 * one.row + 1);
      CHECK(one.leverage == fit.leverage[row]);
      CHECK(one.cook == cooks[row]);
      const Eigen::VectorXd moves = (refit.coefficients - fit.coefficients).cwiseQuotient(se);
      Eigen::Index at = 0;
      const double largest = moves.cwiseAbs().maxCoeff(&at);
      CHECK(std::abs(one.moved_se) == Approx(largest).epsilon(1e-8));
      CHECK(one.moved_se == Approx(moves[at]).epsilon(1e-8));
      CHECK(one.moved_term == coefficients[static_cast<std::size_t>(at)].term);
      CHECK(one.p_bonferroni == outlier_p(fit.subject(), one.studentised).value());
    }
    for (std::size_t i = 0; i + 1 < found.rows.size(); ++i) CHECK(found.rows[i].cook >= found.rows[i + 1].cook);
    const auto outlier =
        std::find_if(found.rows.begin(), found.rows.end(), [](const auto& one) { return one.row == 3; });
    REQUIRE(outlier != found.rows.end());
    REQUIRE_FALSE(found.words.empty());
    CHECK_THAT(found.words.front(), Catch::Contains("ine " + std::to_string(found.rows.front().line)));
  }
}

TEST_CASE("checks: AIC without a row follows from the residual sum of squares without it", "[checks][property]") {
  // −2ℓ of n − 1 rows on the form's scale, identity form, no weights: (n − 1)(ln 2π + ln(RSS/(n − 1)) + 1)
  const Fitted fit = problem(73, false);
  const Eigen::VectorXd rss = rss_without(fit.subject());
  const double n = static_cast<double>(fit.x.rows()) - 1.0;
  for (const Eigen::Index row : {0, 3, 24}) {
    const Fitted refit = without(fit, row);
    const double variance = refit.residuals.squaredNorm() / n;
    double log_density = 0.0;  // of each remaining row at the maximum-likelihood variance
    for (const double e : refit.residuals)
      log_density -= 0.5 * (std::log(2.0 * std::numbers::pi * variance) + e * e / variance);
    CHECK(-0.5 * n * (std::log(2.0 * std::numbers::pi) + std::log(rss[row] / n) + 1.0) ==
          Approx(log_density).epsilon(1e-12));
  }
}

TEST_CASE("checks: a row of full leverage comes first and is said to carry its coefficient alone", "[checks][unit]") {
  Normals normals(74);
  Eigen::MatrixXd x = normals.design(30, 3);
  x.col(2).setZero();
  x(11, 2) = 1.0;
  const Fitted fit = fit_by_long_double(x, normals.vector(30));
  const Influence found = influence(fit.subject(), named_coefficients(fit));
  REQUIRE_FALSE(found.rows.empty());
  CHECK(found.rows.front().row == 11);
  CHECK(found.rows.front().moved_term == "x2");
  CHECK(found.rows.front().moved_se == 0.0);
  CHECK(found.words.front() == "Row 12 of the rows in use has leverage 1: the coefficient of x2 rests on it alone.");
}

TEST_CASE("checks: the row of largest leverage is listed when it lies far from the others", "[checks][unit]") {
  Normals normals(75);
  Eigen::MatrixXd x = normals.design(60, 2);
  x(17, 1) = 12.0;
  Eigen::VectorXd y = x.col(1) + normals.vector(60);
  Fitted fit = fit_by_long_double(x, y);
  const Fitted others = without(fit, 17);
  y[17] = others.coefficients[0] + 12.0 * others.coefficients[1];  // agrees with the others
  fit = fit_by_long_double(x, y);
  const Influence found = influence(fit.subject(), named_coefficients(fit));
  const auto far = std::find_if(found.rows.begin(), found.rows.end(), [](const auto& one) { return one.row == 17; });
  REQUIRE(far != found.rows.end());
  CHECK(std::any_of(found.words.begin(), found.words.end(), [](const std::string& sentence) {
    return sentence.find("far from the others") != std::string::npos && sentence.find("18") != std::string::npos;
  }));
}

TEST_CASE("checks: no row is said to matter when none does", "[checks][unit]") {
  Normals normals(76);
  const Eigen::MatrixXd x = normals.design(5000, 3);
  const Fitted fit = fit_by_long_double(x, x.col(1) + normals.vector(5000));
  const Influence found = influence(fit.subject(), named_coefficients(fit));
  REQUIRE_FALSE(found.words.empty());
  CHECK(found.rows.front().p_bonferroni >= kLevel);
  CHECK_THAT(found.words.front(), Catch::StartsWith("No single row matters"));
  CHECK(found.words.size() == 1);
}

TEST_CASE("checks: shifts of the robust fit are in standard errors and named in words beyond one", "[checks][unit]") {
  const Fitted fit = problem(77, false);
  const Eigen::VectorXd se = standard_errors(fit);
  Insensitive other{fit.coefficients, 4, "MM, bisquare"};
  other.coefficients[2] += 1.5 * se[2];
  other.coefficients[3] -= 0.5 * se[3];
  const Influence found = influence(fit.subject(), named_coefficients(fit), other);
  REQUIRE(found.robust.size() == 4);
  CHECK(found.n_downweighted == 4);
  CHECK(found.robust[2].term == "x2");
  CHECK(found.robust[2].shift_se == Approx(1.5).epsilon(1e-7));
  CHECK(found.robust[3].shift_se == Approx(-0.5).epsilon(1e-7));
  CHECK_THAT(found.words.back(), Catch::Contains("moves x2 by 1.5 standard errors"));
  CHECK_THAT(found.words.back(), Catch::Contains("MM, bisquare") && Catch::Contains("4 rows"));
}

TEST_CASE("checks: influence is empty where there is nothing to judge, and finite everywhere else",
          "[checks][property]") {
  Normals normals(78);
  const Fitted square = fit_by_long_double(normals.design(4, 4), normals.vector(4));
  CHECK(influence(square.subject(), named_coefficients(square)).empty());
  for (const Eigen::Index n : {3, 4, 5, 8}) {
    for (Eigen::Index p = 1; p < n && p < 4; ++p) {
      for (const double scale : {1e-150, 1.0, 1e150}) {
        const Fitted fit = fit_by_long_double(normals.design(n, p), scale * normals.vector(n));
        for (const auto& one : influence(fit.subject(), named_coefficients(fit)).rows) {
          INFO(n << " rows, " << p << " columns, scale " << scale);
          CHECK(std::isfinite(one.leverage + one.cook + one.studentised + one.p_bonferroni + one.prediction_sd +
                              one.moved_se));
        }
      }
    }
  }
}

}  // namespace formsieve::checks

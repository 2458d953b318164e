#include "support.hpp"

#include <catch2/catch.hpp>

#include <cmath>

namespace formsieve::checks {

namespace {

/// A subject whose fitted values and residuals are set by hand: x is the intercept and the fitted value.
Fitted by_hand(const std::vector<double>& fitted, const std::vector<double>& residuals) {
  Fitted fit;
  fit.fitted = vector_of(fitted);
  fit.residuals = vector_of(residuals);
  const Eigen::Index n = fit.fitted.size();
  fit.x = Eigen::MatrixXd::Ones(n, 2);
  fit.x.col(1) = fit.fitted;
  fit.leverage = Eigen::VectorXd::Constant(n, 2.0 / static_cast<double>(n));
  fit.sigma = std::sqrt(fit.residuals.squaredNorm() / static_cast<double>(n - 2));
  fit.weights = Eigen::VectorXd(0);
  fit.term_first = {1};
  fit.term_names = {"x1"};
  return fit;
}

}  // namespace

TEST_CASE("checks: equal-spread gives statistic and ratio worked by hand", "[checks][unit]") {
  // bottom third residuals 1 −1 0 (sd 1), top third 3 −3 0 (sd 3); squares u = 1 1 0 4 4 0 9 9 0 on fitted 1 … 9.
  // Statistic n·R² with R² = (Σ(f − 5)u)² / (Σ(f − 5)²·Σ(u − ū)²), Σ(f − 5)² = 60
  const Fitted fit = by_hand({1, 2, 3, 4, 5, 6, 7, 8, 9}, {1, -1, 0, 2, -2, 0, 3, -3, 0});
  const Check check = check_named(run_all(fit.subject()), "equal-spread");
  CHECK(check.size == Approx(3.0).epsilon(1e-14));
  const double cross = -4.0 * 1 - 3.0 * 1 - 1.0 * 4 + 0.0 * 4 + 2.0 * 9 + 3.0 * 9;  // 34
  const double total = 2 * 1.0 + 2 * 16.0 + 2 * 81.0 - 28.0 * 28.0 / 9.0;           // Σu² − (Σu)²/n
  CHECK(check.statistic.value() == Approx(9.0 * cross * cross / (60.0 * total)).epsilon(1e-13));
  CHECK(check.df.value() == 1.0);
  CHECK_THAT(check.size_words, Catch::Contains("3 times"));
}

TEST_CASE("checks: equal-spread follows the fitted value whatever the row order", "[checks][property]") {
  const Fitted sorted = by_hand({1, 2, 3, 4, 5, 6, 7, 8, 9}, {1, -1, 0, 2, -2, 0, 3, -3, 0});
  const Fitted mixed = by_hand({9, 2, 7, 4, 5, 6, 3, 8, 1}, {0, -1, 3, 2, -2, 0, 0, -3, 1});
  const Check a = check_named(run_all(sorted.subject()), "equal-spread");
  const Check b = check_named(run_all(mixed.subject()), "equal-spread");
  CHECK(a.size == Approx(b.size).epsilon(1e-14));
  CHECK(a.statistic.value() == Approx(b.statistic.value()).epsilon(1e-12));
}

TEST_CASE("checks: equal-spread p is that of chi-squared in closed form", "[checks][property]") {
  Normals normals(2);
  const Fitted fit = fit_by_long_double(normals.design(200, 3), normals.vector(200));
  const auto checks = run_all(fit.subject());
  for (const char* name : {"equal-spread", "equal-spread-by-term"}) {
    const Check& check = check_named(checks, name);
    // upper tail of χ² in closed form: erfc √(x/2) for df 1, e^{−x/2} for df 2
    const double x = check.statistic.value();
    const double expected = check.df.value() == 1.0 ? std::erfc(std::sqrt(x / 2.0)) : std::exp(-x / 2.0);
    CHECK(check.p.value() == Approx(expected).epsilon(1e-12));
  }
}

TEST_CASE("checks: equal-spread fails when the spread grows with the fitted value", "[checks][property]") {
  Normals normals(4);
  const Eigen::Index n = 300;
  const Eigen::MatrixXd x = normals.design(n, 3);
  Eigen::VectorXd y = 3.0 * x.col(1);
  for (Eigen::Index i = 0; i < n; ++i) y[i] += std::exp(0.5 * x(i, 1)) * normals.next();
  const Check check = check_named(run_all(fit_by_long_double(x, y).subject()), "equal-spread");
  CHECK_FALSE(check.passes);
  CHECK(check.size > 1.5);
}

TEST_CASE("checks: equal-spread-by-term is left to equal-spread when there is one column", "[checks][unit]") {
  Normals normals(4);
  const auto checks = run_all(fit_by_long_double(normals.design(30, 2), normals.vector(30)).subject());
  const Check& check = check_named(checks, "equal-spread-by-term");
  CHECK_FALSE(check.statistic);
  CHECK_FALSE(check.p);
  CHECK(check.passes);
  CHECK_THAT(check.note, Catch::Contains("same test as equal-spread"));
  CHECK(check_named(checks, "equal-spread").statistic);
}

TEST_CASE("checks: straightness equals two plain fits", "[checks][property]") {
  Normals normals(6);
  const Eigen::Index n = 50;
  Eigen::MatrixXd x = normals.design(n, 3);
  x.col(1).array() += 1000.0;  // far from zero, where unstandardised cubes would lose all digits
  Eigen::VectorXd y = 2.0 * x.col(1) + x.col(2) + normals.vector(n);
  y.array() += 0.3 * (x.col(1).array() - 1000.0).square();
  const Eigen::VectorXd weights = normals.vector(n).array().exp();
  for (const bool weighted : {false, true}) {
    const Eigen::VectorXd w = weighted ? weights : Eigen::VectorXd::Ones(n);
    const Fitted fit = fit_by_long_double(x, y, weighted ? weights : Eigen::VectorXd(0));
    const Check check = check_named(run_all(fit.subject()), "straightness");
    Eigen::MatrixXd longer(n, 5);
    const Eigen::ArrayXd f = fit.fitted.array() - fit.fitted.mean();
    longer << x, Eigen::VectorXd(f.square()), Eigen::VectorXd(f.cube());
    const auto rss = [&](const Eigen::MatrixXd& design) {
      return w.dot(fit_by_long_double(design, y, w).residuals.cwiseAbs2());
    };
    const double rss0 = rss(x);
    const double rss1 = rss(longer);
    CHECK(check.statistic.value() == Approx((rss0 - rss1) / 2.0 / (rss1 / 45.0)).epsilon(1e-9));
    CHECK(check.df.value() == 2.0);
    CHECK(check.df2.value() == 45.0);
    CHECK(check.size == Approx((rss0 - rss1) / rss(x.leftCols(1))).epsilon(1e-9));
  }
}

TEST_CASE("checks: straightness p is that of F in closed form", "[checks][property]") {
  // with 2 numerator degrees of freedom the upper tail is (1 + 2F/m)^{−m/2}
  Normals normals(8);
  const Check check =
      check_named(run_all(fit_by_long_double(normals.design(24, 3), normals.vector(24)).subject()), "straightness");
  const double m = check.df2.value();
  CHECK(m == 19.0);
  CHECK(check.p.value() == Approx(std::pow(1.0 + 2.0 * check.statistic.value() / m, -m / 2.0)).epsilon(1e-11));
}

TEST_CASE("checks: straightness has nothing to test when indicators hold every power", "[checks][unit]") {
  Normals normals(9);
  Eigen::MatrixXd x = Eigen::MatrixXd::Zero(30, 3);
  x.col(0).setOnes();
  for (Eigen::Index i = 0; i < 30; ++i)
    if (i % 3 > 0) x(i, i % 3) = 1.0;
  const Check check = check_named(run_all(fit_by_long_double(x, normals.vector(30)).subject()), "straightness");
  CHECK_FALSE(check.statistic);
  CHECK(check.passes);
  CHECK_THAT(check.note, Catch::Contains("already holds every power"));
}

TEST_CASE("checks: straightness stays finite when the curve is exact", "[checks][unit]") {
  std::vector<double> x;
  std::vector<double> y;
  for (int i = 0; i < 20; ++i) {
    x.push_back(i);
    y.push_back(static_cast<double>(i) * i);
  }
  const Check check = check_named(run_all(line_through(x, y).subject()), "straightness");
  CHECK(std::isfinite(check.statistic.value()));
  CHECK(check.statistic.value() > 1e6);
  CHECK_FALSE(check.passes);
}

}  // namespace formsieve::checks

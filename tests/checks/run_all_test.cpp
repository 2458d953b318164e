#include "checks/holm.hpp"
#include "checks/verdict.hpp"
#include "checks/words.hpp"
#include "support.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::checks {

namespace {

/// Every number of a check is finite, p-values lie in [0, 1], and a check without a statistic says why.
void require_sound(const std::vector<Check>& checks) {
  for (const Check& check : checks) {
    INFO(check.name << ": " << check.note);
    CHECK(std::isfinite(check.size));
    CHECK(std::isfinite(check.size2.value_or(0.0)));
    CHECK(std::isfinite(check.statistic.value_or(0.0)));
    CHECK((check.p.value_or(0.0) >= 0.0 && check.p.value_or(0.0) <= 1.0));
    CHECK(check.p.has_value() == check.p_adjusted.has_value());
    CHECK((check.statistic.has_value() || !check.note.empty()));
    CHECK_FALSE(check.size_words.empty());
    CHECK_FALSE(check.hypothesis.empty());
    CHECK_FALSE(check.method.empty());
  }
}

std::vector<std::string> failed(const std::vector<Check>& checks) {
  std::vector<std::string> names;
  for (const Check& check : checks)
    if (!check.passes) names.push_back(check.name);
  return names;
}

}  // namespace

TEST_CASE("checks: Holm's adjustment equals a worked example", "[checks][reference]") {
  // 0.005·5, 0.01·4, 0.03·3, max(0.04·2, 0.09), 0.5; statsmodels 0.13.5 multipletests(method='holm') gives the same
  const auto adjusted = holm(std::vector<double>{0.01, 0.04, 0.03, 0.005, 0.5});
  const std::vector<double> expected{0.04, 0.09, 0.09, 0.025, 0.5};
  for (std::size_t i = 0; i < expected.size(); ++i) CHECK(adjusted[i] == Approx(expected[i]).epsilon(1e-14));
  CHECK(holm({}).empty());
  CHECK(holm(std::vector<double>{0.6, 0.7}) == std::vector<double>{1.0, 1.0});
}

TEST_CASE("checks: all are listed in their order, independence only with an order", "[checks][unit]") {
  Normals normals(41);
  const Fitted fit = fit_by_long_double(normals.design(40, 4), normals.vector(40));
  const auto names_of = [](const std::vector<Check>& checks) {
    std::vector<std::string> result;
    for (const Check& check : checks) result.push_back(check.name);
    return result;
  };
  auto expected = names();
  CHECK(names_of(run_all(fit.ordered(row_order(40)))) == expected);
  CHECK(std::erase(expected, "independence") == 1);
  CHECK(std::erase(expected, "independence-at-lags") == 1);
  CHECK(names_of(run_all(fit.subject())) == expected);
}

TEST_CASE("checks: p-values are adjusted over the checks that have one, and every verdict follows the table",
          "[checks][unit]") {
  Normals normals(42);
  const auto checks = run_all(fit_by_long_double(normals.design(40, 4), normals.vector(40)).ordered(row_order(40)));
  std::vector<double> p;
  std::vector<double> adjusted;
  for (const Check& check : checks)
    if (check.p) {
      p.push_back(*check.p);
      adjusted.push_back(*check.p_adjusted);
      CHECK(check.verdict == verdict(rule_of(check.name), check.size, check.size2, check.p_adjusted));
    }
  CHECK(p.size() == 10);  // all but separable-terms
  CHECK(adjusted == holm(p));
  require_sound(checks);
}

TEST_CASE("checks: of Anscombe's four sets only the first passes", "[checks][reference]") {
  // Anscombe 1973, Table: four sets with the same line, R² and residual sum of squares (from memory)
  const std::vector<double> x{10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5};
  const std::vector<double> x4{8, 8, 8, 8, 8, 8, 8, 19, 8, 8, 8};
  const std::vector<double> y1{8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68};
  const std::vector<double> y2{9.14, 8.14, 8.74, 8.77, 9.26, 8.10, 6.13, 3.10, 9.13, 7.26, 4.74};
  const std::vector<double> y3{7.46, 6.77, 12.74, 7.11, 7.81, 8.84, 6.08, 5.39, 8.15, 6.42, 5.73};
  const std::vector<double> y4{6.58, 5.76, 7.71, 8.84, 8.47, 7.04, 5.25, 12.50, 5.56, 7.91, 6.89};
  CHECK(line_through(x, y1).coefficients[1] == Approx(0.500).margin(5e-4));

  CHECK(failed(run_all(line_through(x, y1).subject())).empty());
  const auto bent = failed(run_all(line_through(x, y2).subject()));
  CHECK(std::count(bent.begin(), bent.end(), "straightness") == 1);
  const auto outlying = failed(run_all(line_through(x, y3).subject()));
  CHECK(std::count(outlying.begin(), outlying.end(), "no-single-row") == 1);
  const auto far = run_all(line_through(x4, y4).subject());
  CHECK_THAT(check_named(far, "no-single-row").note, Catch::Contains("row 8 of the rows in use has leverage 1"));
  CHECK(failed(far) == std::vector<std::string>{"no-single-row"});
}

TEST_CASE("checks: above 5,000 rows normality goes by Anderson–Darling", "[checks][unit]") {
  Normals normals(43);
  const auto checks = run_all(fit_by_long_double(normals.design(5001, 2), normals.vector(5001)).subject());
  const Check& check = check_named(checks, "normal-residuals");
  CHECK_THAT(check.method, Catch::Contains("Anderson–Darling"));
  CHECK(check.p.value() > 1e-3);
  CHECK(std::abs(check.size) < 0.15);
  require_sound(checks);
  const auto fewer = run_all(fit_by_long_double(normals.design(5000, 2), normals.vector(5000)).subject());
  CHECK(check_named(fewer, "normal-residuals").method == "Shapiro–Wilk");
}

TEST_CASE("checks: an exact fit is listed with a note and passes", "[checks][unit]") {
  std::vector<double> x;
  std::vector<double> y;
  for (int i = 0; i < 12; ++i) {
    x.push_back(i);
    y.push_back(3.0 + 0.1 * i);
  }
  const Fitted fit = line_through(x, y);
  const auto checks = run_all(fit.ordered(row_order(12)));
  require_sound(checks);
  CHECK(failed(checks).empty());
  for (const char* name : {"normal-residuals", "equal-spread", "straightness", "no-single-row", "independence"}) {
    CHECK_FALSE(check_named(checks, name).statistic);
    CHECK_THAT(check_named(checks, name).note, Catch::Contains("exact"));
  }
}

TEST_CASE("checks: as many coefficients as rows are listed with a note and pass", "[checks][unit]") {
  Normals normals(44);
  Fitted fit = fit_by_long_double(normals.design(4, 4), normals.vector(4));
  fit.sigma = std::numeric_limits<double>::quiet_NaN();
  const auto checks = run_all(fit.ordered(row_order(4)));
  require_sound(checks);
  CHECK(failed(checks).empty());
}

TEST_CASE("checks: the candidate without any term is judged as far as that goes", "[checks][unit]") {
  Normals normals(45);
  const auto checks = run_all(fit_by_long_double(normals.design(30, 1), normals.vector(30)).ordered(row_order(30)));
  require_sound(checks);
  CHECK(check_named(checks, "normal-residuals").p);
  CHECK(check_named(checks, "independence").p);
  CHECK_FALSE(check_named(checks, "equal-spread").statistic);
  CHECK_FALSE(check_named(checks, "straightness").statistic);
  CHECK(check_named(checks, "separable-terms").statistic.value() == 1.0);
}

TEST_CASE("checks: small, tied and wild residuals never give a number that is not finite", "[checks][property]") {
  Normals normals(46);
  for (const Eigen::Index n : {3, 4, 5, 6, 8, 11}) {
    for (Eigen::Index p = 1; p < n && p < 5; ++p) {
      INFO(n << " rows, " << p << " columns");
      const Eigen::MatrixXd x = normals.design(n, p);
      Eigen::VectorXd signs = normals.vector(n).cwiseSign();
      for (const double scale : {1e-150, 1.0, 1e150}) {
        require_sound(run_all(fit_by_long_double(x, scale * normals.vector(n)).ordered(row_order(n))));
        require_sound(run_all(fit_by_long_double(x, scale * signs).ordered(row_order(n))));
      }
      const Eigen::VectorXd weights = (3.0 * normals.vector(n)).array().exp();
      require_sound(run_all(fit_by_long_double(x, normals.vector(n), weights).ordered(row_order(n))));
    }
  }
}

TEST_CASE("checks: a fit that is not finite is listed with a note and passes", "[checks][unit]") {
  Normals normals(47);
  Fitted fit = fit_by_long_double(normals.design(10, 3), normals.vector(10));
  fit.residuals[3] = std::numeric_limits<double>::quiet_NaN();
  const auto checks = run_all(fit.ordered(row_order(10)));
  require_sound(checks);
  CHECK(failed(checks).empty());
}

TEST_CASE("checks: spread that the weights account for is no unequal spread", "[checks][property]") {
  Normals normals(48);
  const Eigen::Index n = 200;
  const Eigen::MatrixXd x = normals.design(n, 2);
  const Eigen::VectorXd weights = (-2.0 * x.col(1)).array().exp();  // spread grows as e^{x1}, so does the fitted value
  const Eigen::VectorXd y = 3.0 * x.col(1) + normals.vector(n).cwiseQuotient(weights.cwiseSqrt());
  const Check weighted = check_named(run_all(fit_by_long_double(x, y, weights).subject()), "equal-spread");
  const Check plain = check_named(run_all(fit_by_long_double(x, y).subject()), "equal-spread");
  CHECK(weighted.passes);
  CHECK(weighted.size == Approx(1.0).margin(0.3));
  CHECK_FALSE(plain.passes);
  CHECK(plain.size > 4.0);
  CHECK_THAT(weighted.note, Catch::Contains("√weight"));
}

TEST_CASE("checks: multiplying all weights by a constant changes nothing", "[checks][property]") {
  Normals normals(49);
  const Eigen::VectorXd weights = normals.vector(40).array().exp();
  const Eigen::MatrixXd x = normals.design(40, 3);
  const Eigen::VectorXd y = normals.vector(40);
  const auto a = run_all(fit_by_long_double(x, y, weights).ordered(row_order(40)));
  const auto b = run_all(fit_by_long_double(x, y, 1e6 * weights).ordered(row_order(40)));
  for (std::size_t i = 0; i < a.size(); ++i) {
    INFO(a[i].name);
    CHECK(a[i].statistic.value() == Approx(b[i].statistic.value()).epsilon(1e-10));
    CHECK(a[i].p.value_or(0.0) == Approx(b[i].p.value_or(0.0)).epsilon(1e-8));
    CHECK(a[i].size == Approx(b[i].size).epsilon(1e-10));
  }
}

TEST_CASE("checks: numbers are written for reading", "[checks][unit]") {
  CHECK(number_words(0.0) == "0");
  CHECK(number_words(-0.012345) == "−0.0123");
  CHECK(number_words(4.5678) == "4.57");
  CHECK(number_words(12345.6) == "12346");
  const std::vector<std::size_t> lines = {7};
  CHECK(row_words(lines, 0) == "line 7");
  CHECK(row_words(lines, 1) == "row 2 of the rows in use");
}

}  // namespace formsieve::checks

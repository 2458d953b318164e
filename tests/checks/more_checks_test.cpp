// Brown–Forsythe, Ljung–Box, White, straightness and spread by term, condition indices.

#include "checks/bend.hpp"
#include "checks/brown_forsythe.hpp"
#include "checks/condition.hpp"
#include "checks/ljung_box.hpp"
#include "checks/spread.hpp"
#include "checks/white.hpp"
#include "support.hpp"

#include <Eigen/LU>
#include <Eigen/SVD>

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/fisher_f.hpp>
#include <boost/math/distributions/students_t.hpp>
#include <catch2/catch.hpp>

#include <algorithm>
#include <array>
#include <cmath>

namespace formsieve::checks {

TEST_CASE("checks: Brown and Forsythe's test equals SciPy", "[checks][reference]") {
  // SciPy 1.10.1 levene(a, b, c, center='median')
  const Eigen::VectorXd all =
      vector_of({3.1, -0.4, 1.2, 0.7, -2.2, 0.1, -1.9, 0.5, -4.1, 2.2, -3.3, 4.0, 1.1, 9.1, -7.7, 0.2, 5.5, -6.1});
  std::array<std::vector<Eigen::Index>, 3> groups;
  for (Eigen::Index i = 0; i < 18; ++i) groups[i < 7 ? 0 : (i < 13 ? 1 : 2)].push_back(i);
  const auto test = brown_forsythe(all, groups);
  CHECK(test.value().f == Approx(5.708824580320791).epsilon(1e-13));
  CHECK(test->p == Approx(0.014337656821617374).epsilon(1e-12));
  CHECK(test->df1 == 2.0);
  CHECK(test->df2 == 15.0);
  CHECK(test->deviation[0] == Approx((3.0 + 0.5 + 1.1 + 0.6 + 2.3 + 0.0 + 2.0) / 7.0).epsilon(1e-14));
  // equal deviations within every group leave nothing to compare with
  CHECK_FALSE(
      brown_forsythe(vector_of({1, -1, 2, -2, 3, -3}), std::vector<std::vector<Eigen::Index>>{{0, 1}, {2, 3}, {4, 5}}));
}

TEST_CASE("checks: tails of the distributions behind the p-values are 5 % at handbook quantiles", "[checks][reference]") {
  // handbook tables, four or five digits, from memory: χ²(.95), t(.975), F(.95)
  namespace bm = boost::math;
  const auto tail = [](const auto& distribution, double x) { return bm::cdf(bm::complement(distribution, x)); };
  const std::array<std::array<double, 2>, 4> chi{{{1, 3.841}, {2, 5.991}, {5, 11.070}, {10, 18.307}}};
  for (const auto& [df, x] : chi) CHECK(tail(bm::chi_squared(df), x) == Approx(0.05).epsilon(1e-3));
  const std::array<std::array<double, 2>, 4> t{{{5, 2.571}, {10, 2.228}, {30, 2.042}, {120, 1.980}}};
  for (const auto& [df, x] : t) CHECK(2.0 * tail(bm::students_t(df), x) == Approx(0.05).epsilon(2e-3));
  const std::array<std::array<double, 3>, 5> f{
      {{1, 10, 4.965}, {2, 10, 4.103}, {5, 10, 3.326}, {3, 20, 3.098}, {10, 30, 2.165}}};
  for (const auto& [df1, df2, x] : f) CHECK(tail(bm::fisher_f(df1, df2), x) == Approx(0.05).epsilon(1e-3));
}

TEST_CASE("checks: thirds go by value, then by row, and are listed in row order", "[checks][unit]") {
  const Thirds thirds = thirds_of(vector_of({5, 1, 5, 2, 9, 5, 5}));
  CHECK(thirds.bottom == std::vector<Eigen::Index>{1, 3});
  CHECK(thirds.middle == std::vector<Eigen::Index>{0, 2, 5});
  CHECK(thirds.top == std::vector<Eigen::Index>{4, 6});
}

TEST_CASE("checks: Ljung and Box's test equals statsmodels", "[checks][reference]") {
  // statsmodels 0.13.5 acorr_ljungbox and tsa.stattools.acf
  const Eigen::VectorXd x = vector_of({2, -1, 3, 5, -4, 0, 1, -2, 4, -3, 2, 2, -5, 1, 0, 3, -1, -2, 4, 1});
  const std::array<double, 3> q{3.673390074472745, 8.606367272486315, 13.25932803348513};
  const std::array<double, 3> p{0.05528762325750804, 0.07172784088078364, 0.02106607044128475};
  const std::array<Eigen::Index, 3> lags{1, 4, 5};
  for (std::size_t i = 0; i < lags.size(); ++i) {
    const auto test = ljung_box(x, lags[i]);
    CHECK(test.value().q == Approx(q[i]).epsilon(1e-12));
    CHECK(test->p == Approx(p[i]).epsilon(1e-11));
  }
  CHECK(ljung_box(x, 4)->autocorrelation[3] == Approx(-0.3068965517241378).epsilon(1e-12));
  CHECK_FALSE(ljung_box(x, 20));
  CHECK_FALSE(ljung_box(Eigen::VectorXd::Constant(9, 2.0), 2));
}

TEST_CASE("checks: independence-at-lags finds what neighbours do not show", "[checks][unit]") {
  Normals normals(81);
  const Eigen::Index n = 200;
  Eigen::VectorXd error = normals.vector(n);
  for (Eigen::Index t = 4; t < n; ++t) error[t] += 0.7 * error[t - 4];  // seasons of four
  const auto checks = run_all(fit_by_long_double(normals.design(n, 2), error).ordered(row_order(n)));
  const Check& lags = check_named(checks, "independence-at-lags");
  CHECK(lags.verdict == Verdict::broken);
  CHECK(lags.size > 0.5);
  CHECK_THAT(lags.size_words, Catch::Contains("4 rows apart"));
  CHECK_THAT(lags.method, Catch::Contains("lags 1 to 10"));
  CHECK(check_named(checks, "independence").p.value() > 1e-3);
}

TEST_CASE("checks: White's test equals a plain regression on squares and products", "[checks][property]") {
  Normals normals(82);
  const Eigen::Index n = 2500;  // more than one chunk
  Eigen::MatrixXd x = normals.design(n, 4);
  x.col(1).array() += 100.0;
  x.col(3) = (x.col(3).array() > 0.3).cast<double>();  // its square is itself
  const Fitted fit = fit_by_long_double(x, x.col(2) + normals.vector(n));
  const Subject subject = fit.subject();
  const Workings workings = prepare(subject);
  const Eigen::VectorXd squares = centred_squares(workings);
  Eigen::MatrixXd longer(n, 9);  // constant, three columns, two squares, three products
  const Eigen::VectorXd a = x.col(1).array() - 100.0;
  longer << x.col(0), a, x.col(2), x.col(3), a.cwiseAbs2(), x.col(2).cwiseAbs2(), a.cwiseProduct(x.col(2)),
      a.cwiseProduct(x.col(3)), x.col(2).cwiseProduct(x.col(3));
  const Fitted auxiliary = fit_by_long_double(longer, squares);
  const double r2 = 1.0 - auxiliary.residuals.squaredNorm() / squares.squaredNorm();
  const auto test = white(workings.plain.q, squares);
  CHECK(test.value().df == 8.0);
  CHECK(test->lm == Approx(static_cast<double>(n) * r2).epsilon(1e-9));
  CHECK((test->predicted - auxiliary.fitted).lpNorm<Eigen::Infinity>() < 1e-9);
}

TEST_CASE("checks: equal-spread-any-shape finds a spread that is narrowest in the middle", "[checks][property]") {
  Normals normals(83);
  const Eigen::Index n = 400;
  const Eigen::MatrixXd x = normals.design(n, 3);
  Eigen::VectorXd y = x.col(1);
  for (Eigen::Index i = 0; i < n; ++i) y[i] += (0.2 + std::abs(x(i, 1))) * normals.next();
  const auto checks = run_all(fit_by_long_double(x, y).subject());
  const Check& shape = check_named(checks, "equal-spread-any-shape");
  CHECK(shape.verdict == Verdict::broken);
  CHECK(shape.size > 2.0);
  CHECK(check_named(checks, "equal-spread-by-thirds").p.value() < 0.01);
  CHECK(check_named(checks, "equal-spread").size == Approx(1.0).margin(0.3));
}

TEST_CASE("checks: equal-spread-any-shape is left out with a note when it has too many columns", "[checks][unit]") {
  Normals normals(84);
  const auto too_few = run_all(fit_by_long_double(normals.design(29, 4), normals.vector(29)).subject());
  const Check& few = check_named(too_few, "equal-spread-any-shape");  // 10 columns need 30 rows
  CHECK_FALSE(few.p);
  CHECK_FALSE(few.verdict);
  CHECK(few.passes);
  CHECK_THAT(few.note, Catch::Contains("too few rows for 10 squares"));
  const auto too_many = run_all(fit_by_long_double(normals.design(1000, 25), normals.vector(1000)).subject());
  CHECK_THAT(check_named(too_many, "equal-spread-any-shape").note, Catch::Contains("too many"));
}

TEST_CASE("checks: straightness-by-term equals plain fits with each term's square and cube", "[checks][property]") {
  Normals normals(85);
  const Eigen::Index n = 60;
  Eigen::MatrixXd x = normals.design(n, 5);
  x.col(1).array() += 50.0;
  x.col(4) = (x.col(4).array() > 0.0).cast<double>();  // holds its own powers
  const Eigen::VectorXd bend = (x.col(2).array() * x.col(2).array()).matrix();
  const Fitted fit = fit_by_long_double(x, x.col(1) + x.col(2) + 0.5 * bend + normals.vector(n));
  Fitted terms = fit;
  terms.term_first = {1, 2, 4};  // the second term has two columns
  terms.term_names = {"a", "b", "c"};
  const Check check = check_named(run_all(terms.subject()), "straightness-by-term");
  REQUIRE(check.parts.size() == 3);
  const double rss0 = fit.residuals.squaredNorm();
  const double tss = (fit.y.array() - fit.y.mean()).square().sum();
  const Eigen::VectorXd of_b = fit.coefficients[2] * x.col(2) + fit.coefficients[3] * x.col(3);
  const std::array<Eigen::VectorXd, 2> curves{x.col(1), of_b};
  for (std::size_t j = 0; j < curves.size(); ++j) {
    Eigen::MatrixXd longer(n, 7);
    const Eigen::ArrayXd c = curves[j].array() - curves[j].mean();
    longer << x, Eigen::VectorXd(c.square()), Eigen::VectorXd(c.cube());
    const double rss1 = fit_by_long_double(longer, fit.y).residuals.squaredNorm();
    const double f = (rss0 - rss1) / 2.0 / (rss1 / 53.0);
    CHECK(check.parts[j].statistic.value() == Approx(f).epsilon(1e-9));
    CHECK(check.parts[j].p.value() == Approx(std::pow(1.0 + 2.0 * f / 53.0, -53.0 / 2.0)).epsilon(1e-9));
    CHECK(check.parts[j].size == Approx((rss0 - rss1) / tss).epsilon(1e-9));
    if (j == 1) CHECK(check.size2.value() == Approx(1.0 - rss1 / 53.0 / (rss0 / 55.0)).epsilon(1e-9));
  }
  CHECK(check.parts[1].subject == "b");
  CHECK_FALSE(check.parts[2].p);  // an indicator
  CHECK(check.p.value() == Approx(std::min(1.0, 2.0 * check.parts[1].p.value())).epsilon(1e-12));
  CHECK_THAT(check.size_words, Catch::Contains("letting b bend"));
}

TEST_CASE("checks: equal-spread-by-term names the term that the spread follows", "[checks][property]") {
  Normals normals(86);
  const Eigen::Index n = 500;
  const Eigen::MatrixXd x = normals.design(n, 4);
  Eigen::VectorXd y = x.col(1) + x.col(3);
  for (Eigen::Index i = 0; i < n; ++i) y[i] += std::exp(-0.6 * x(i, 2)) * normals.next();
  const Fitted fit = fit_by_long_double(x, y);
  const Check check = check_named(run_all(fit.subject()), "equal-spread-by-term");
  REQUIRE(check.parts.size() == 3);
  CHECK(check.parts[1].p.value() < 1e-6);
  CHECK(check.parts[0].p.value() > 1e-4);
  CHECK(check.size == check.parts[1].size);
  CHECK(check.size < 0.5);  // narrower at the top of x2
  CHECK(check.verdict == Verdict::broken);
  CHECK_THAT(check.size_words, Catch::Contains("top third of x2"));
  // of one column alone the statistic is n times the squared correlation with the squared residuals
  Eigen::VectorXd squares = fit.residuals.cwiseAbs2();
  squares.array() -= squares.mean();
  const Eigen::VectorXd column = x.col(2).array() - x.col(2).mean();
  const double r = squares.dot(column) / (squares.norm() * column.norm());
  CHECK(check.parts[1].statistic.value() == Approx(static_cast<double>(n) * r * r).epsilon(1e-9));
}

TEST_CASE("checks: condition indices equal the singular values of the scaled design", "[checks][property]") {
  Normals normals(87);
  Eigen::MatrixXd x = normals.design(40, 4);
  x.col(1).array() += 30.0;
  x.col(3) = x.col(2) + 0.02 * x.col(3);
  const Condition ours = condition(centred_basis(x, Eigen::VectorXd(0)));
  Eigen::MatrixXd scaled = x;
  scaled.colwise().normalize();
  const Eigen::JacobiSVD<Eigen::MatrixXd> svd(scaled, Eigen::ComputeThinV);
  for (Eigen::Index k = 0; k < 4; ++k)
    CHECK(ours.index[k] == Approx(svd.singularValues()[0] / svd.singularValues()[k]).epsilon(1e-10));
  // proportions belong to the variances: column j of the inverse Gram matrix
  const Eigen::MatrixXd inverse = (scaled.transpose() * scaled).inverse();
  for (Eigen::Index j = 0; j < 4; ++j) {
    const double term = svd.matrixV()(j, 3) / svd.singularValues()[3];
    CHECK(ours.proportion(j, 3) == Approx(term * term / inverse(j, j)).epsilon(1e-8));
  }
  CHECK(entangled_columns(ours) == std::vector<Eigen::Index>{2, 3});
  // a column far from zero is near the intercept only, which entangles no two terms
  CHECK(entangled_columns(condition(centred_basis(x.leftCols(3), Eigen::VectorXd(0)))).empty());
}

}  // namespace formsieve::checks

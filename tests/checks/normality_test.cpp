#include "checks/anderson_darling.hpp"
#include "checks/moments.hpp"
#include "checks/shapiro_wilk.hpp"
#include "support.hpp"

#include <catch2/catch.hpp>

#include <cmath>

namespace formsieve::checks {

namespace {

/// √(−ln u) at u = (i + ½)/n: the quantiles of a Rayleigh distribution, falling.
Eigen::VectorXd rayleigh_quantiles(Eigen::Index n) {
  Eigen::VectorXd x(n);
  for (Eigen::Index i = 0; i < n; ++i)
    x[i] = std::sqrt(-std::log((static_cast<double>(i) + 0.5) / static_cast<double>(n)));
  return x;
}

const std::vector<double> kWeightsOfElevenMen{148, 154, 158, 160, 161, 162, 166, 170, 182, 195, 236};

}  // namespace

TEST_CASE("checks: Shapiro–Wilk gives the published value for the weights of eleven men", "[checks][reference]") {
  // data Shapiro & Wilk 1965, section 4; W and p of AS R94, Royston 1995
  const auto test = shapiro_wilk(vector_of(kWeightsOfElevenMen));
  REQUIRE(test);
  CHECK(test->w == Approx(0.788815).margin(1e-6));
  CHECK(test->p == Approx(0.0067038).margin(1e-7));
}

TEST_CASE("checks: Shapiro–Wilk p is near 5 % at the tabled points of W", "[checks][reference]") {
  // Shapiro & Wilk 1965, Table 6, 5 % points for n = 10, 15, 20; p of AS R94 at these points
  CHECK(shapiro_wilk_p(1.0 - 0.842, 10) == Approx(0.0466).margin(5e-5));
  CHECK(shapiro_wilk_p(1.0 - 0.881, 15) == Approx(0.0491).margin(5e-5));
  CHECK(shapiro_wilk_p(1.0 - 0.905, 20) == Approx(0.0512).margin(5e-5));
}

TEST_CASE("checks: Shapiro–Wilk agrees with single precision from 12 to 5,000 rows", "[checks][reference]") {
  // SciPy 1.10.1 stats.shapiro, which computes W in single precision
  struct Row {
    Eigen::Index n;
    double w, p;
  };
  for (const Row& row :
       {Row{12, 0.9802887439727783, 0.9847712516784668}, Row{50, 0.9746120572090149, 0.35267844796180725},
        Row{200, 0.9730539321899414, 0.0006844801246188581}, Row{1000, 0.9725947380065918, 8.48977626480979e-13},
        Row{5000, 0.9724990725517273, 5.757263256768101e-30}}) {
    const auto test = shapiro_wilk(rayleigh_quantiles(row.n));
    REQUIRE(test);
    CHECK(test->w == Approx(row.w).margin(2e-7));
    CHECK(std::log(test->p) == Approx(std::log(row.p)).epsilon(1e-4).margin(1e-5));
  }
}

TEST_CASE("checks: Shapiro–Wilk is exact for three values", "[checks][unit]") {
  // 0, 0, 1: W = 3/4, the smallest possible, hence p = 0. 0, 1, 3: a = (−1, 0, 1)/√2, W = (3/√2)²/(14/3) = 27/28
  CHECK(shapiro_wilk(vector_of({0, 0, 1}))->w == Approx(0.75).epsilon(1e-12));
  CHECK(shapiro_wilk(vector_of({0, 0, 1}))->p == Approx(0.0).margin(1e-7));
  const auto test = shapiro_wilk(vector_of({3, 0, 1}));
  CHECK(test->w == Approx(27.0 / 28.0).epsilon(1e-12));
  const double expected = 6.0 / M_PI * (std::asin(std::sqrt(27.0 / 28.0)) - std::asin(std::sqrt(0.75)));
  CHECK(test->p == Approx(expected).epsilon(1e-10));
}

TEST_CASE("checks: Shapiro–Wilk weights are antisymmetric and of unit length", "[checks][property]") {
  for (const Eigen::Index n : {3, 4, 5, 6, 7, 11, 12, 100, 5000}) {
    const Eigen::VectorXd a = shapiro_wilk_weights(n);
    CHECK(a.squaredNorm() == Approx(1.0).epsilon(1e-12));
    CHECK((a + a.reverse()).lpNorm<Eigen::Infinity>() < 1e-15);
  }
}

TEST_CASE("checks: Shapiro–Wilk does not depend on location, scale, sign or row order", "[checks][property]") {
  const Eigen::VectorXd x = vector_of(kWeightsOfElevenMen);
  const double w = shapiro_wilk(x)->w;
  CHECK(shapiro_wilk(x.array() * 1e-9)->w == Approx(w).epsilon(1e-12));
  CHECK(shapiro_wilk(x.array() * -1e9 + 5.0)->w == Approx(w).epsilon(1e-12));
  CHECK(shapiro_wilk(x.reverse())->w == Approx(w).epsilon(1e-12));
}

TEST_CASE("checks: Shapiro–Wilk is unset when rows or spread do not suffice", "[checks][unit]") {
  CHECK_FALSE(shapiro_wilk(vector_of({1, 2})));
  CHECK_FALSE(shapiro_wilk(vector_of({4, 4, 4, 4})));
  CHECK_FALSE(shapiro_wilk(Eigen::VectorXd::LinSpaced(5001, 0.0, 1.0)));
}

TEST_CASE("checks: Anderson–Darling p is that of Stephens' percentage points", "[checks][reference]") {
  // Stephens in D'Agostino & Stephens 1986, both parameters estimated
  CHECK(anderson_darling_p(0.561) == Approx(0.15).epsilon(0.02));
  CHECK(anderson_darling_p(0.631) == Approx(0.10).epsilon(0.02));
  CHECK(anderson_darling_p(0.752) == Approx(0.05).epsilon(0.02));
  CHECK(anderson_darling_p(0.873) == Approx(0.025).epsilon(0.02));
  CHECK(anderson_darling_p(1.035) == Approx(0.01).epsilon(0.02));
  CHECK(anderson_darling_p(1.159) == Approx(0.005).epsilon(0.02));
}

TEST_CASE("checks: Anderson–Darling p falls over the whole range", "[checks][property]") {
  double last = 1.0;
  for (double a = 0.16; a < 300.0; a *= 1.01) {  // the first polynomial has its own slight bend below 0.16
    const double p = anderson_darling_p(a);
    // the table's four pieces do not meet exactly: up to 0.0023 at 0.6
    CHECK(p <= last + 0.0025);
    last = p;
  }
  CHECK(last < 1e-30);
}

TEST_CASE("checks: Anderson–Darling agrees with another program at 6,000 rows", "[checks][reference]") {
  // statsmodels 0.13.5 stats.diagnostic.normal_ad
  const auto test = anderson_darling(rayleigh_quantiles(6000));
  REQUIRE(test);
  CHECK(test->a2 == Approx(34.222197857258834).epsilon(1e-8));
  CHECK(anderson_darling(rayleigh_quantiles(200))->a2 == Approx(1.1418751548102932).epsilon(1e-8));
  CHECK(anderson_darling(rayleigh_quantiles(200))->p == Approx(0.0053769125094779244).epsilon(1e-8));
}

TEST_CASE("checks: Anderson–Darling stays finite when one value lies beyond the reach of a double's tail",
          "[checks][unit]") {
  Eigen::VectorXd x = Eigen::VectorXd::LinSpaced(6000, -1e-3, 1e-3);
  x[0] = 1e6;  // standardised: 77, whose tail probability underflows
  const auto test = anderson_darling(x);
  REQUIRE(test);
  CHECK(std::isfinite(test->a2));
  CHECK(test->a2 > 1000.0);
  CHECK(test->p < 1e-30);
}

TEST_CASE("checks: moments are those worked by hand", "[checks][unit]") {
  // 0, 0, 0, 4: mean 1, m2 = 3, m3 = 6, m4 = 21. g1 = 6/3^1.5 = 1.1547, g2 = 21/9 − 3 = −2/3
  const Moments shape = moments(vector_of({0, 0, 0, 4}));
  CHECK(shape.skewness == Approx(2.0 / std::sqrt(3.0)).epsilon(1e-14));
  CHECK(shape.excess_kurtosis == Approx(-2.0 / 3.0).epsilon(1e-14));
  CHECK(shape.skewness_adjusted == Approx(2.0).epsilon(1e-14));         // · √12/2
  CHECK(shape.excess_kurtosis_adjusted == Approx(4.0).epsilon(1e-14));  // 3/(2·1)·(5·(−2/3) + 6)
  CHECK(moments(vector_of({7, 7, 7})).skewness == 0.0);
  CHECK(moments(1e-170 * vector_of({0, 0, 0, 4})).skewness == Approx(2.0 / std::sqrt(3.0)).epsilon(1e-14));
}

}  // namespace formsieve::checks

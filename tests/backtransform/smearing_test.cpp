#include "backtransform/backtransform.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <random>

namespace {

using namespace formsieve;
using backtransform::Smearing;
using forms::Kind;

const Eigen::VectorXd kUnweighted;

/// Skewed residuals about 0.
Eigen::VectorXd residuals_of(Eigen::Index n, double scale, unsigned seed) {
  std::mt19937 generator(seed);
  std::gamma_distribution<double> gamma(2.0);
  Eigen::VectorXd e(n);
  for (Eigen::Index i = 0; i < n; ++i) e(i) = scale * (gamma(generator) - 2.0);
  return e.array() - e.mean();
}

Eigen::VectorXd weights_of(Eigen::Index n, unsigned seed) {
  std::mt19937 generator(seed);
  std::uniform_real_distribution<double> uniform(0.2, 5.0);
  return Eigen::VectorXd::NullaryExpr(n, [&] { return uniform(generator); });
}

/// The definition, term by term.
double plain_mean(const forms::Form& form, const Eigen::VectorXd& residuals, const Eigen::VectorXd& weights, double eta,
                  double weight) {
  long double total = 0.0L;
  for (Eigen::Index j = 0; j < residuals.size(); ++j) {
    const double e = weights.size() == 0 ? residuals(j) : residuals(j) * std::sqrt(weights(j) / weight);
    total += forms::inverse(form, eta + e);
  }
  return static_cast<double>(total / static_cast<long double>(residuals.size()));
}

struct Shape {
  forms::Form form;
  double low, high;  ///< range of η to try, beyond the inverse's domain where it has an edge
};

std::vector<Shape> shapes() {
  return {
      {{Kind::identity}, -3, 3},
      {{Kind::sqrt}, -1.5, 3},
      {{Kind::square}, -1.5, 3},
      {{Kind::cube}, -2, 2},
      {{Kind::cube_root}, -2, 2},
      {{Kind::ln}, -3, 3},
      {{Kind::log10}, -2, 2},
      {{Kind::reciprocal}, -0.5, 4},
      {{Kind::reciprocal_sqrt}, -0.5, 4},
      {{Kind::reciprocal_square}, -0.5, 4},
      {{Kind::exp}, -0.5, 4},
      {{Kind::asinh}, -2, 2},
      {{Kind::logit}, -3, 3},
      {{Kind::arcsine_sqrt}, -0.5, 2},
      {{Kind::power, {0.5}}, -1.5, 3},
      {{Kind::power, {1.0}}, -1.5, 3},
      {{Kind::power, {-1.0}}, -0.5, 4},
      {{Kind::power, {-0.7}}, -0.5, 4},
      {{Kind::power, {1.7}}, -0.5, 4},
      {{Kind::box_cox, {0.0}}, -3, 3},
      {{Kind::box_cox, {0.4}}, -4, 3},
      {{Kind::box_cox, {-0.5}}, -2, 3},
      {{Kind::yeo_johnson, {0.0}}, -3, 3},
      {{Kind::yeo_johnson, {0.6}}, -3, 3},
      {{Kind::yeo_johnson, {2.0}}, -3, 3},
  };
}

}  // namespace

TEST_CASE("backtransform: the mean equals the average of the inverse over the residuals", "[backtransform][property]") {
  for (Shape shape : shapes()) {
    for (const bool moved : {false, true}) {
      if (moved) {
        shape.form.reflect = 101.0;
        shape.form.shift = 0.75;
      }
      for (const bool weighted : {false, true}) {
        const Eigen::VectorXd e = residuals_of(240, 0.25, 3);
        const Eigen::VectorXd w = weighted ? weights_of(240, 4) : kUnweighted;
        const Smearing smearing(shape.form, e, w);
        for (int step = 0; step <= 40; ++step) {
          const double eta = shape.low + (shape.high - shape.low) * step / 40.0;
          const double weight = weighted ? 0.5 + 0.1 * step : 1.0;
          const double plain = plain_mean(shape.form, e, w, eta, weight);
          const double ours = smearing.mean(eta, weight);
          INFO(forms::label(shape.form, "y") << " eta " << eta << " weight " << weight);
          if (std::isfinite(plain)) {
            CHECK(ours == Approx(plain).epsilon(1e-12).margin(1e-14));
          } else {
            CHECK(std::isnan(ours));
          }
        }
      }
    }
  }
}

TEST_CASE("backtransform: small arguments of Yeo–Johnson keep their digits", "[backtransform][property]") {
  const forms::Form form{Kind::yeo_johnson, {0.0}};
  const Eigen::VectorXd e = residuals_of(100, 1e-9, 8);
  const Smearing smearing(form, e, kUnweighted);
  for (const double eta : {-2e-8, 1e-8, 3e-7}) {
    CHECK(smearing.mean(eta) == Approx(plain_mean(form, e, kUnweighted, eta, 1.0)).epsilon(1e-12));
  }
}

TEST_CASE("backtransform: ln smearing has the factor of Duan", "[backtransform][unit]") {
  const Eigen::VectorXd e = (Eigen::VectorXd(2) << std::log(0.5), std::log(1.7)).finished();
  const Smearing smearing({Kind::ln}, e, kUnweighted);
  REQUIRE(smearing.constant_factor());
  CHECK(*smearing.constant_factor() == Approx(1.1).epsilon(1e-15));
  CHECK(smearing.mean(std::log(40.0)) == Approx(44.0).epsilon(1e-14));
  CHECK(smearing.naive(std::log(40.0)) == Approx(40.0).epsilon(1e-14));
  const Smearing decimal({Kind::log10}, (Eigen::VectorXd(2) << std::log10(0.5), std::log10(1.7)).finished(),
                         kUnweighted);
  CHECK(*decimal.constant_factor() == Approx(1.1).epsilon(1e-14));
  CHECK_FALSE(Smearing({Kind::sqrt}, e, kUnweighted).constant_factor());
  CHECK_FALSE(Smearing({Kind::ln}, e, Eigen::VectorXd::Ones(2)).constant_factor());
}

TEST_CASE("backtransform: normal residuals of ln give the lognormal mean", "[backtransform][property]") {
  // Mean of a lognormal, exp(μ + σ²/2); four standard errors of the simulation.
  std::mt19937 generator(1);
  std::normal_distribution<double> normal(0.0, 0.5);
  const Eigen::VectorXd e = Eigen::VectorXd::NullaryExpr(200000, [&] { return normal(generator); });
  const double standard_error = std::sqrt((std::exp(0.25) - 1.0) * std::exp(0.25) / 200000.0);
  CHECK(std::abs(Smearing({Kind::ln}, e, kUnweighted).mean(0.0) - std::exp(0.125)) < 4.0 * standard_error);
}

TEST_CASE("backtransform: sqrt adds the mean square and stops at the edge", "[backtransform][unit]") {
  const Eigen::VectorXd e = (Eigen::VectorXd(4) << -0.3, -0.1, 0.1, 0.3).finished();
  const Smearing smearing({Kind::sqrt}, e, kUnweighted);
  CHECK(smearing.mean(2.0) == Approx(4.05).epsilon(1e-15));
  CHECK(smearing.mean(0.2) == Approx((0.0 + 0.01 + 0.09 + 0.25) / 4.0).epsilon(1e-14));  // −0.1 counts as 0
  CHECK(smearing.mean(-0.2) == Approx(0.01 / 4.0).epsilon(1e-13));
  CHECK(smearing.mean(-0.4) == 0.0);
  CHECK(smearing.naive(-0.4) == 0.0);
}

TEST_CASE("backtransform: weights standardise the residuals", "[backtransform][unit]") {
  // Residuals 1 at weight 4 and −2 at weight 1 are 2 and −2 standardised; a row of weight 4 sees 1 and −1.
  const Eigen::VectorXd e = (Eigen::VectorXd(2) << 1.0, -2.0).finished();
  const Eigen::VectorXd w = (Eigen::VectorXd(2) << 4.0, 1.0).finished();
  const Smearing smearing({Kind::sqrt}, e, w);
  CHECK(smearing.mean(5.0, 4.0) == Approx((36.0 + 16.0) / 2.0).epsilon(1e-15));
  CHECK(smearing.mean(5.0) == Approx((49.0 + 9.0) / 2.0).epsilon(1e-15));
}

TEST_CASE("backtransform: a mean that cannot be formed is NaN", "[backtransform][unit]") {
  const Eigen::VectorXd e = (Eigen::VectorXd(2) << -0.5, 0.5).finished();
  const Smearing reciprocal({Kind::reciprocal}, e, kUnweighted);
  CHECK(std::isfinite(reciprocal.mean(0.51)));
  CHECK(std::isnan(reciprocal.mean(0.5)));
  CHECK(std::isnan(reciprocal.mean(0.2)));
  CHECK(std::isfinite(reciprocal.naive(0.2)));
  CHECK(std::isnan(reciprocal.naive(0.0)));
  const Smearing ln({Kind::ln}, e, kUnweighted);
  CHECK(std::isnan(ln.mean(800.0)));  // beyond the largest double
  CHECK(std::isnan(ln.naive(800.0)));
  CHECK(std::isnan(ln.mean(std::numeric_limits<double>::quiet_NaN())));
}

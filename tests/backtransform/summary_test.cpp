#include "backtransform/backtransform.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>

using namespace formsieve;
using backtransform::judged;
using backtransform::Smearing;
using forms::Kind;

TEST_CASE("backtransform: a correction is judged by bias and error over all repeats", "[backtransform][unit]") {
  const std::vector<double> measured{1.0, 2.0};
  const std::vector<double> predicted{2.0, 2.0, 1.0, 4.0};  // errors 1, 0, 0, 2
  const auto correction = judged("smearing", 1.1, predicted, measured);
  CHECK(correction.method == "smearing");
  CHECK(correction.factor == 1.1);
  CHECK(correction.cv_bias.value() == 0.75);
  CHECK(correction.cv_rmse.value() == Approx(std::sqrt(5.0 / 4.0)).epsilon(1e-15));
  const std::vector<double> undefined{2.0, std::numeric_limits<double>::quiet_NaN()};
  CHECK_FALSE(judged("none", 1.0, undefined, measured).cv_rmse);
  CHECK_FALSE(judged("none", 1.0, undefined, measured).cv_bias);
}

TEST_CASE("backtransform: the summary states the factor beside no correction", "[backtransform][unit]") {
  const Eigen::VectorXd e = (Eigen::VectorXd(2) << -0.5, 0.5).finished();
  const Eigen::VectorXd eta = (Eigen::VectorXd(2) << 1.0, 3.0).finished();
  const Smearing sqrt({Kind::sqrt}, e, Eigen::VectorXd());
  const auto summary = backtransform::summarise(sqrt, eta, Eigen::VectorXd(), "y", "1 + x");
  CHECK(summary.smearing_factor == Approx(10.5 / 10.0).epsilon(1e-15));  // (1.25 + 9.25)/(1 + 9)
  CHECK(summary.used == "smearing");
  CHECK(summary.formula == "y = (1 + x)² + 0.25");
  REQUIRE(summary.corrections.size() == 2);
  CHECK(summary.corrections[0].method == "none");
  CHECK(summary.corrections[1].factor == summary.smearing_factor);
  const Smearing ln({Kind::ln}, e, Eigen::VectorXd());
  CHECK(backtransform::summarise(ln, eta, Eigen::VectorXd(), "y", "1 + x").smearing_factor ==
        Approx(std::cosh(0.5)).epsilon(1e-15));
}

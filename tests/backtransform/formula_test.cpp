#include "backtransform/backtransform.hpp"

#include <catch2/catch.hpp>

#include <cmath>

namespace {

using namespace formsieve;
using backtransform::formula;
using backtransform::formula_validity;
using backtransform::Smearing;
using forms::Form;
using forms::Kind;

const Eigen::VectorXd kUnweighted;

Eigen::VectorXd two(double a, double b) { return (Eigen::VectorXd(2) << a, b).finished(); }
/// Mean exp(e) 1.03142.
Eigen::VectorXd for_ln() { return two(std::log(0.8), std::log(1.26284)); }
Eigen::VectorXd for_roots() { return two(-0.146, 0.146); }  // mean square 0.021316

}  // namespace

TEST_CASE("backtransform: the formula carries the correction of ln-like responses", "[backtransform][unit]") {
  const std::string right = "3.21 + 0.84·ln(floor_area)";
  CHECK(formula(Smearing({Kind::ln}, for_ln(), kUnweighted), "energy_kwh", right, 4) ==
        "energy_kwh = 1.031 · exp(3.21 + 0.84·ln(floor_area))");
  CHECK(formula(Smearing({Kind::ln}, for_ln(), kUnweighted), "energy_kwh", right, 6) ==
        "energy_kwh = 1.03142 · exp(3.21 + 0.84·ln(floor_area))");
  CHECK(formula(Smearing({Kind::box_cox, {0.0}}, for_ln(), kUnweighted), "y", "1 + x") == "y = 1.0314 · exp(1 + x)");
  CHECK(formula(Smearing({Kind::log10}, two(0.0, 0.0), kUnweighted), "y", "1 + x") == "y = 1 · 10^(1 + x)");
}

TEST_CASE("backtransform: the formula undoes shift and reflection", "[backtransform][unit]") {
  Form shifted{Kind::ln};
  shifted.shift = 20.0;
  CHECK(formula(Smearing(shifted, for_ln(), kUnweighted), "y", "1 + x") == "y = 1.0314 · exp(1 + x) − 20");
  Form reflected{Kind::ln};
  reflected.reflect = 100.0;
  CHECK(formula(Smearing(reflected, for_ln(), kUnweighted), "fill", "1 + x") == "fill = 100 − 1.0314 · exp(1 + x)");
  reflected.kind = Kind::sqrt;
  reflected.shift = 0.5;
  CHECK(formula(Smearing(reflected, for_roots(), kUnweighted), "fill", "1 + x") ==
        "fill = 100.5 − ((1 + x)² + 0.021316)");
  Form line{Kind::identity};
  line.shift = -3.0;
  CHECK(formula(Smearing(line, for_roots(), kUnweighted), "y", "1 + x") == "y = 1 + x + 3");
}

TEST_CASE("backtransform: the formula of roots adds the moments of the residuals", "[backtransform][unit]") {
  const Smearing sqrt({Kind::sqrt}, for_roots(), kUnweighted);
  CHECK(formula(sqrt, "y", "10.2 + 0.4·x") == "y = (10.2 + 0.4·x)² + 0.021316");
  CHECK(formula_validity(sqrt) ==
        "holds where η, the form-scale prediction, is at least 0.146; below that, arguments η + e below 0 count as 0");
  CHECK(formula(Smearing({Kind::cube_root}, for_roots(), kUnweighted), "y", "1 + x") ==
        "y = η³ + 0.063948·η + 0, where η = 1 + x");
  const Smearing weighted({Kind::sqrt}, two(1.0, -2.0), two(4.0, 2.25));  // standardised 2 and −3
  CHECK(formula(weighted, "y", "1 + x") == "y = η² − 1·η + 6.5, where η = 1 + x, for a row of weight 1");
}

TEST_CASE("backtransform: the formula of other forms is put in words", "[backtransform][unit]") {
  const Smearing reciprocal({Kind::reciprocal}, for_roots(), kUnweighted);
  CHECK(formula(reciprocal, "y", "1 + x") == "y = mean over the training residuals e of 1/(η + e), where η = 1 + x");
  CHECK(formula_validity(reciprocal) == "arguments η + e not above 0 leave the mean undefined");
  const Smearing many({Kind::reciprocal}, Eigen::VectorXd::Zero(2000), kUnweighted);
  CHECK(formula(many, "y", "1 + x") ==
        "y = mean over 1,001 quantiles e of the training residuals of 1/(η + e), where η = 1 + x");
  const Smearing weighted({Kind::reciprocal}, for_roots(), two(1.0, 4.0));
  CHECK(formula(weighted, "y", "1 + x") ==
        "y = mean over the standardised training residuals e of 1/(η + e/√w), where η = 1 + x");
  CHECK(formula_validity(Smearing({Kind::arcsine_sqrt}, for_roots(), kUnweighted)) ==
        "arguments η + e below 0 count as 0, those above 1.5708 count as 1.5708");
  CHECK(formula_validity(Smearing({Kind::ln}, for_roots(), kUnweighted)).empty());
}

TEST_CASE("backtransform: the figures of the formula give the mean", "[backtransform][property]") {
  const Eigen::VectorXd e = (Eigen::VectorXd(5) << -0.31, 0.02, 0.11, 0.4, -0.22).finished();
  const double eta = 2.5;
  const Smearing sqrt({Kind::sqrt}, e, kUnweighted);
  CHECK(eta * eta + sqrt.moments().second == Approx(sqrt.mean(eta)).epsilon(1e-14));
  const Smearing ln({Kind::ln}, e, kUnweighted);
  CHECK(ln.mean_exp() * std::exp(eta) == Approx(ln.mean(eta)).epsilon(1e-14));
  const Smearing asinh({Kind::asinh}, e, kUnweighted);
  CHECK(asinh.mean_cosh() * std::sinh(eta) + asinh.mean_sinh() * std::cosh(eta) ==
        Approx(asinh.mean(eta)).epsilon(1e-14));
}

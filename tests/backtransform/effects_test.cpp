// Effects beside plain arithmetic: elasticities, differences of means, and the delta method by differences in every
// coefficient.
#include "backtransform/effects.hpp"
#include "fit/least_squares.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <catch2/catch.hpp>

#include <cmath>
#include <random>

namespace {

using namespace formsieve;
using backtransform::direction_words;
using backtransform::Effect;
using backtransform::EffectTerm;
using backtransform::Method;
using Catch::Contains;
using Eigen::Index;
using forms::Form;
using forms::Kind;

const Eigen::VectorXd kUnweighted;

EffectTerm number(const std::string& column, Form form, int declared = 0) {
  EffectTerm term{column, std::move(form), declared};
  term.min = 1.0;
  term.q1 = 2.0;
  term.median = 3.0;
  term.q3 = 5.0;
  term.max = 9.0;
  return term;
}

/// A fit on random rows of these terms, with a correction of it.
struct Fitted {
  Fitted(Form response_form, std::vector<EffectTerm> of, const Eigen::VectorXd& truth, Method method = Method::smearing)
      : response(std::move(response_form)), terms(std::move(of)) {
    std::mt19937 generator(4);
    std::uniform_real_distribution<double> uniform(1.0, 9.0);
    std::normal_distribution<double> normal;
    const Index n = 120;
    x = Eigen::MatrixXd::Ones(n, truth.size());
    for (Index i = 0; i < n; ++i) {
      Index at = 1;
      for (const auto& term : terms) {
        const double raw = term.form.kind == Kind::levels ? static_cast<double>(i % 3) : uniform(generator);
        std::vector<double> columns(forms::n_columns(term.form));
        forms::evaluate(term.form, raw, columns);
        for (const double value : columns) x(i, at++) = value;
      }
    }
    z = x * truth;
    for (Index i = 0; i < n; ++i) z[i] += 0.1 * normal(generator);
    fit = *fit::least_squares(x, z, kUnweighted);
    measured = z.unaryExpr([&](double value) { return forms::inverse(response, value); });
    df = static_cast<double>(n - truth.size());
    correction = backtransform::make_correction(
        method, {response, fit.fitted, fit.residuals, kUnweighted, measured, fit.sigma, df});
  }
  std::vector<Effect> effects() const {
    return backtransform::effects({response, name, terms, fit.coefficients, fit.covariance, df, *correction});
  }

  Form response;
  std::vector<EffectTerm> terms;
  std::string name = "energy_kwh";
  Eigen::MatrixXd x;
  Eigen::VectorXd z, measured;
  fit::Fit fit;
  double df = 0.0;
  std::unique_ptr<const backtransform::MeanCorrection> correction;
};

/// mean at `to` less mean at `from` of the first term, the second at its median 3, smeared term by term.
double plain_change(const Fitted& f, const Eigen::VectorXd& coefficients, double from, double to) {
  const auto mean = [&](double raw) {
    std::vector<double> first(forms::n_columns(f.terms[0].form)), second(forms::n_columns(f.terms[1].form));
    forms::evaluate(f.terms[0].form, raw, first);
    forms::evaluate(f.terms[1].form, f.terms[1].form.kind == Kind::levels ? 0.0 : 3.0, second);
    double eta = coefficients[0];
    Index at = 1;
    for (const double value : first) eta += coefficients[at++] * value;
    for (const double value : second) eta += coefficients[at++] * value;
    double total = 0.0;
    for (const double e : f.fit.residuals) total += forms::inverse(f.response, eta + e);
    return total / static_cast<double>(f.fit.residuals.size());
  };
  return mean(to) - mean(from);
}

void check_difference(const Fitted& f, const Effect& effect, double from, double to) {
  const double change = plain_change(f, f.fit.coefficients, from, to);
  CHECK(effect.change.value() == Approx(change).epsilon(1e-11));
  Eigen::VectorXd gradient(f.fit.coefficients.size());
  for (Index k = 0; k < gradient.size(); ++k) {
    Eigen::VectorXd moved = f.fit.coefficients;
    moved[k] += 1e-5;
    const double above = plain_change(f, moved, from, to);
    moved[k] -= 2e-5;
    gradient[k] = (above - plain_change(f, moved, from, to)) / 2e-5;
  }
  const double reach = boost::math::quantile(boost::math::students_t(f.df), 0.975) *
                       std::sqrt(gradient.dot(f.fit.covariance * gradient));
  CHECK(effect.low.value() == Approx(change - reach).epsilon(1e-6).margin(1e-7));
  CHECK(effect.high.value() == Approx(change + reach).epsilon(1e-6).margin(1e-7));
}

}  // namespace

TEST_CASE("backtransform: logarithms on both sides give elasticities", "[backtransform][unit]") {
  const Fitted f({Kind::ln}, {number("floor_area", {Kind::ln}, 1), number("fill", {Kind::log10}, 1)},
                 Eigen::Vector3d(1.0, 0.84, -0.5));
  const auto effects = f.effects();
  REQUIRE(effects.size() == 2);
  const double t = boost::math::quantile(boost::math::students_t(f.df), 0.975);
  const double beta = f.fit.coefficients[1], reach = t * f.fit.se[1];
  CHECK(effects[0].kind == "elasticity");
  CHECK(effects[0].change.value() == Approx(100.0 * (std::pow(1.1, beta) - 1.0)).epsilon(1e-12));
  CHECK(effects[0].low.value() == Approx(100.0 * (std::pow(1.1, beta - reach) - 1.0)).epsilon(1e-10));
  CHECK(effects[0].high.value() == Approx(100.0 * (std::pow(1.1, beta + reach) - 1.0)).epsilon(1e-10));
  CHECK_THAT(effects[0].words, Catch::StartsWith("10 % more floor_area goes with 8.") &&
                                   Contains("% more energy_kwh (95 % interval ") && Contains("rising") &&
                                   Catch::EndsWith(", as declared."));
  CHECK(effects[1].change.value() ==
        Approx(100.0 * (std::pow(1.1, f.fit.coefficients[2] / std::log(10.0)) - 1.0)).epsilon(1e-12));
  CHECK_THAT(effects[1].words,
             Contains("% less energy_kwh") && Catch::EndsWith("falling over the seen range, declared rising."));
}

TEST_CASE("backtransform: a logarithm that is reflected or shifted has no elasticity", "[backtransform][unit]") {
  const Fitted f({Kind::ln}, {number("a", {Kind::ln, {}, 10.0, 0.0}), number("b", {Kind::ln, {}, {}, 1.0})},
                 Eigen::Vector3d(1.0, 0.5, 0.3));
  for (const auto& effect : f.effects()) CHECK(effect.kind == "quartiles");
}

TEST_CASE("backtransform: other effects are differences of means with their delta-method interval",
          "[backtransform][property]") {
  const Form spline{Kind::spline, {2.0, 4.0, 7.0}};
  const Form levels{Kind::levels, {}, {}, 0.0, {"north", "south", "west"}};
  EffectTerm site{"site", levels};
  site.most_frequent = "north";
  SECTION("one column, ln") {
    const Fitted f({Kind::ln}, {number("a", {Kind::sqrt}), site}, Eigen::Vector4d(1.0, 0.5, 0.3, -0.2));
    const auto effects = f.effects();
    REQUIRE(effects.size() == 3);
    CHECK(effects[0].kind == "quartiles");
    check_difference(f, effects[0], 2.0, 5.0);
    CHECK_THAT(effects[0].words, Contains("a at 5 rather than 2 (upper and lower quartile) goes with ") &&
                                     Contains(" more energy_kwh, ") && Contains("95 % interval of the difference"));
    CHECK(effects[1].kind == "levels");
    CHECK(effects[1].to_level == "south");
    CHECK(effects[2].to_level == "west");
    CHECK(effects[2].from_level == "north");
    CHECK(effects[2].change.value() < 0.0);
    CHECK_THAT(effects[2].words, Contains("site = west rather than north (the most frequent) goes with "));
  }
  SECTION("several columns, sqrt") {
    const Fitted f({Kind::sqrt}, {number("a", spline), number("b", {Kind::identity})},
                   Eigen::Vector4d(3.0, 0.5, -0.3, 0.1));
    check_difference(f, f.effects()[0], 2.0, 5.0);
  }
  SECTION("levels first, reflected response") {
    const Fitted f({Kind::ln, {}, 500.0, 0.0}, {site, number("b", {Kind::identity})},
                   Eigen::Vector4d(1.0, 0.5, -0.3, 0.1));
    const auto effects = f.effects();
    check_difference(f, effects[0], 0.0, 1.0);
    check_difference(f, effects[1], 0.0, 2.0);
    CHECK(effects[2].direction == "falling");  // more of ln(500 − y) is less y
  }
  SECTION("equal quartiles") {
    EffectTerm narrow = number("a", {Kind::identity});
    narrow.q1 = narrow.q3 = 3.0;
    const Fitted f({Kind::ln}, {narrow, number("b", {Kind::identity})}, Eigen::Vector3d(1.0, 0.1, 0.1));
    const auto effects = f.effects();
    CHECK(effects[0].kind == "range");
    check_difference(f, effects[0], 1.0, 9.0);
  }
}

TEST_CASE("backtransform: an effect whose mean is undefined says so", "[backtransform][unit]") {
  // 1/y = η with η near 0 at the upper quartile: residuals reach the pole.
  const Fitted f({Kind::reciprocal}, {number("a", {Kind::identity}), number("b", {Kind::identity})},
                 Eigen::Vector3d(4.9, -1.0, 0.04));
  const auto effects = f.effects();
  CHECK_FALSE(effects[0].change);
  CHECK_FALSE(effects[0].low);
  CHECK_THAT(effects[0].words, Contains("cannot be compared, since a mean is undefined there"));
}

TEST_CASE("backtransform: directions are read off the form over the seen range", "[backtransform][unit]") {
  const Eigen::VectorXd up = Eigen::VectorXd::Constant(1, 2.0);
  CHECK(direction_words({Kind::ln}, up, 1.0, 9.0, 1) == "rising");
  CHECK(direction_words({Kind::ln}, up, 1.0, 9.0, -1) == "falling");
  CHECK(direction_words({Kind::reciprocal}, up, 1.0, 9.0, 1) == "falling");
  CHECK(direction_words({Kind::ln, {}, 10.0, 0.0}, up, 1.0, 9.0, 1) == "falling");
  CHECK(direction_words({Kind::ln}, Eigen::VectorXd::Zero(1), 1.0, 9.0, 1) == "flat");
  const Eigen::VectorXd hill = Eigen::Vector2d(6.0, -1.0);  // 6u − u², highest at 3
  CHECK(direction_words({Kind::quadratic}, hill, 1.0, 9.0, 1) == "rising then falling");
  CHECK(direction_words({Kind::quadratic}, hill, 1.0, 9.0, -1) == "falling then rising");
  CHECK(direction_words({Kind::quadratic}, hill, 1.0, 2.9, 1) == "rising");
  CHECK(direction_words({Kind::quadratic}, hill, 3.1, 9.0, 1) == "falling");
}

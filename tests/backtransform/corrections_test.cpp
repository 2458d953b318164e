// The ways back beside plain loops over their definitions; thirds with their ties and small groups.
#include "backtransform/corrections.hpp"
#include "backtransform/g_function.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <random>

namespace {

using namespace formsieve;
using backtransform::make_correction;
using backtransform::Method;
using backtransform::NewRow;
using backtransform::ThirdsSmearing;
using backtransform::TrainingFit;
using forms::Kind;

/// Residuals whose spread grows with the fitted value.
struct Made {
  Eigen::VectorXd fitted, residuals, weights, measured;
  forms::Form response;
  double sigma = 0.0, df = 0.0;

  TrainingFit fit() const { return {response, fitted, residuals, weights, measured, sigma, df}; }
};

Made made(forms::Form response, Eigen::Index m, bool weighted, unsigned seed) {
  std::mt19937 generator(seed);
  std::normal_distribution<double> normal;
  Made fit;
  fit.response = std::move(response);
  fit.fitted.resize(m);
  fit.residuals.resize(m);
  fit.measured.resize(m);
  if (weighted) fit.weights.resize(m);
  for (Eigen::Index i = 0; i < m; ++i) {
    fit.fitted[i] = 3.0 + std::abs(normal(generator));
    fit.residuals[i] = 0.1 * (fit.fitted[i] - 2.5) * normal(generator);
    fit.measured[i] = forms::inverse(fit.response, fit.fitted[i] + fit.residuals[i]);
    if (weighted) fit.weights[i] = std::exp(0.5 * normal(generator));
  }
  fit.df = static_cast<double>(m) - 3.0;
  fit.sigma = std::sqrt(fit.residuals.squaredNorm() / fit.df);
  return fit;
}

}  // namespace

TEST_CASE("backtransform: the ratio of means is that of the training rows", "[backtransform][unit]") {
  for (const Kind kind : {Kind::ln, Kind::sqrt, Kind::reciprocal}) {
    const Made fit = made({kind}, 60, false, 1);
    double naive = 0.0;
    for (const double eta : fit.fitted) naive += forms::inverse(fit.response, eta);
    const double ratio = fit.measured.sum() / naive;
    const auto correction = make_correction(Method::ratio_of_means, fit.fit());
    CHECK(correction->mean({3.3}) == Approx(ratio * forms::inverse(fit.response, 3.3)).epsilon(1e-13));
  }
  const Made below = made({Kind::ln, {}, -50.0, 0.0}, 60, false, 1);  // a negative response has a ratio too
  CHECK(std::isfinite(make_correction(Method::ratio_of_means, below.fit())->mean({3.3})));
}

TEST_CASE("backtransform: smearing by thirds averages over the residuals of the row's third",
          "[backtransform][property]") {
  for (const Kind kind : {Kind::ln, Kind::sqrt, Kind::reciprocal, Kind::cube_root})
    for (const bool weighted : {false, true}) {
      const Made fit = made({kind}, 100, weighted, 2);
      const ThirdsSmearing thirds(fit.fit());
      std::vector<double> sorted(fit.fitted.begin(), fit.fitted.end());
      std::sort(sorted.begin(), sorted.end());
      CHECK(thirds.cuts()[0] == sorted[33]);  // the 34th of 100
      CHECK(thirds.cuts()[1] == sorted[66]);
      CHECK(thirds.complete());
      for (const double eta : {2.9, thirds.cuts()[0], 3.6, thirds.cuts()[1], 4.4}) {
        const auto third = [&](double at) { return at <= sorted[33] ? 0 : at <= sorted[66] ? 1 : 2; };
        double total = 0.0, count = 0.0;
        for (Eigen::Index j = 0; j < 100; ++j) {
          if (third(fit.fitted[j]) != third(eta)) continue;
          const double root = weighted ? std::sqrt(fit.weights[j] / 1.7) : 1.0;
          total += forms::inverse(fit.response, eta + root * fit.residuals[j]);
          count += 1.0;
        }
        CHECK(thirds.mean({eta, 0.0, 1.7}) == Approx(total / count).epsilon(1e-12));
      }
    }
}

TEST_CASE("backtransform: equal fitted values stay in one third, and a small third uses all", "[backtransform][unit]") {
  Made fit = made({Kind::ln}, 60, false, 3);
  for (Eigen::Index i = 0; i < 60; ++i) fit.fitted[i] = i < 5 ? 1.0 : i < 45 ? 2.0 : 3.0;
  const ThirdsSmearing thirds(fit.fit());
  CHECK(thirds.cuts()[0] == 2.0);
  CHECK(thirds.cuts()[1] == 2.0);
  CHECK(thirds.third_of(2.0) == 0);
  CHECK(thirds.third_of(2.5) == 2);
  CHECK_FALSE(thirds.complete());  // the middle third is empty
  CHECK(thirds.of_third(0).n_residuals() == 45);
  CHECK(thirds.of_third(1).n_residuals() == 60);
  CHECK(thirds.of_third(2).n_residuals() == 15);
}

TEST_CASE("backtransform: the formula by thirds names three factors and where they end", "[backtransform][unit]") {
  const auto text = [](const forms::Form& response) {
    const Made fit = made(response, 90, false, 4);
    return formula(ThirdsSmearing(fit.fit()), "y", "1 + x", 4);
  };
  const Made fit = made({Kind::ln}, 90, false, 4);
  const ThirdsSmearing thirds(fit.fit());
  std::string ln = text({Kind::ln});
  INFO(ln << "\n" << text({Kind::sqrt}) << "\n" << text({Kind::reciprocal}));
  char expected[300];
  std::snprintf(
      expected, sizeof expected,
      "y = f · exp(1 + x), where f is %.4g up to a form-scale prediction of %.4g, %.4g up to %.4g and %.4g above",
      thirds.of_third(0).mean_exp(), thirds.cuts()[0], thirds.of_third(1).mean_exp(), thirds.cuts()[1],
      thirds.of_third(2).mean_exp());
  CHECK(ln == expected);
  CHECK_THAT(text({Kind::ln, {}, 100.0, 0.0}), Catch::StartsWith("y = 100 − f · exp(1 + x), where f is "));
  CHECK_THAT(text({Kind::sqrt}), Catch::StartsWith("y = η² ") && Catch::EndsWith("where η = 1 + x"));
  CHECK_THAT(text({Kind::reciprocal}), Catch::Contains("training residuals e of the row's third of the predictions of "
                                                       "1/(η + e), where η = 1 + x, and the thirds end at η = "));
}

TEST_CASE("backtransform: the unbiased mean of ln uses the leverage of the row", "[backtransform][unit]") {
  const Made fit = made({Kind::ln}, 30, false, 5);
  const auto correction = make_correction(Method::unbiased, fit.fit());
  CHECK(correction->mean({2.0, 0.2}) ==
        Approx(std::exp(2.0) * backtransform::unbiased_factor(27.0, fit.sigma, 0.2, 1.0)).epsilon(1e-14));
  CHECK(correction->mean({2.0, 0.2}) < correction->mean({2.0, 0.1}));
  // log10 is ln in other units: the same mean.
  Made decimal = fit;
  decimal.response = {Kind::log10};
  decimal.sigma /= std::log(10.0);
  CHECK(make_correction(Method::unbiased, decimal.fit())->mean({2.0 / std::log(10.0), 0.2}) ==
        Approx(correction->mean({2.0, 0.2})).epsilon(1e-13));
}

TEST_CASE("backtransform: each response form has the corrections that differ", "[backtransform][unit]") {
  CHECK(backtransform::methods_for({Kind::identity}).size() == 2);
  CHECK(backtransform::methods_for({Kind::ln}).size() == 6);
  CHECK(backtransform::methods_for({Kind::box_cox, {0.0}}).size() == 6);
  CHECK(backtransform::methods_for({Kind::sqrt}).size() == 5);
}

TEST_CASE("backtransform: slopes of the means are their derivatives", "[backtransform][property]") {
  const Made fit = made({Kind::ln}, 90, false, 6);
  for (const Method method : backtransform::methods_for(fit.response)) {
    const auto correction = make_correction(method, fit.fit());
    CHECK(correction->slope({3.4, 0.05}) == Approx(correction->mean({3.4, 0.05})).epsilon(1e-9));  // (c·e^η)′ = c·e^η
  }
  const Made root = made({Kind::sqrt}, 90, false, 6);
  const ThirdsSmearing thirds(root.fit());
  const double cut = thirds.cuts()[0];  // at the cut itself the mean jumps, its slope does not
  CHECK(thirds.slope({cut}) == Approx(2.0 * (cut + thirds.of_third(0).moments().first)).epsilon(1e-8));
}

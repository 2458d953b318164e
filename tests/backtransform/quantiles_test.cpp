// Beyond 1,001 residuals a mean without closed form runs over the means of 1,001 equal slices of them.
#include "backtransform/backtransform.hpp"
#include "backtransform/slices.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <random>

namespace {

using namespace formsieve;
using backtransform::kMostResiduals;
using backtransform::slice_means;
using backtransform::Smearing;
using forms::Kind;

/// Residuals with tails far heavier than normal (t with 4 degrees of freedom), of standard deviation about `scale`.
std::vector<double> heavy_tailed(std::size_t n, double scale, unsigned seed) {
  std::mt19937 generator(seed);
  std::student_t_distribution<double> t(4.0);
  std::vector<double> e(n);
  for (double& value : e) value = scale * t(generator) / std::sqrt(2.0);
  std::sort(e.begin(), e.end());
  return e;
}

Eigen::VectorXd as_vector(const std::vector<double>& e) {
  return Eigen::Map<const Eigen::VectorXd>(e.data(), static_cast<Eigen::Index>(e.size()));
}

double mean_over(const forms::Form& form, const std::vector<double>& e, double eta) {
  long double total = 0.0L;
  for (const double value : e) total += forms::inverse(form, eta + value);
  return static_cast<double>(total / static_cast<long double>(e.size()));
}

/// Mean over all values of the variance within their slice: the mean of squares falls by it when slices take over.
double variance_within(const std::vector<double>& e, const std::vector<double>& means) {
  const auto mean_square = [](const std::vector<double>& v) {
    return std::inner_product(v.begin(), v.end(), v.begin(), 0.0L) / static_cast<long double>(v.size());
  };
  return static_cast<double>(mean_square(e) - mean_square(means));
}

}  // namespace

TEST_CASE("backtransform: slices share the values on their boundaries", "[backtransform][unit]") {
  const std::vector<double> values{1.0, 2.0, 6.0};
  const auto halves = slice_means(values, 2);
  REQUIRE(halves.size() == 2);
  CHECK(halves[0] == Approx((1.0 + 0.5 * 2.0) / 1.5).epsilon(1e-15));
  CHECK(halves[1] == Approx((0.5 * 2.0 + 6.0) / 1.5).epsilon(1e-15));
  const auto pairs = slice_means(std::vector<double>{1.0, 3.0, 5.0, 7.0}, 2);
  CHECK(pairs == std::vector<double>{2.0, 6.0});
}

TEST_CASE("backtransform: slices rise and keep the mean", "[backtransform][property]") {
  for (const std::size_t n : {1002UL, 1500UL, 20000UL}) {
    const auto e = heavy_tailed(n, 1.0, 5);
    const auto means = slice_means(e, kMostResiduals);
    REQUIRE(means.size() == kMostResiduals);
    CHECK(std::is_sorted(means.begin(), means.end()));
    const double all = std::accumulate(e.begin(), e.end(), 0.0) / static_cast<double>(n);
    const double sliced = std::accumulate(means.begin(), means.end(), 0.0) / static_cast<double>(means.size());
    CHECK(sliced == Approx(all).margin(1e-14));
  }
}

TEST_CASE("backtransform: 1,001 quantiles stand for many residuals within the bound", "[backtransform][property]") {
  // Taylor about each slice's mean: |error| ≤ ½·max|h″|·(mean variance within a slice). h″ from the inverse by hand.
  const double eta = 2.0;
  const auto e = heavy_tailed(50000, 0.1, 7);
  const double low = eta + e.front(), high = eta + e.back();
  REQUIRE(low > 0.3);
  struct Row {
    forms::Form form;
    double curvature;  ///< max|h″| on [low, high]
  };
  const Row rows[] = {
      {{Kind::reciprocal}, 2.0 / std::pow(low, 3)},                      // h = 1/z
      {{Kind::reciprocal_sqrt}, 6.0 / std::pow(low, 4)},                 // h = 1/z²
      {{Kind::box_cox, {0.25}}, 0.75 * std::pow(1.0 + 0.25 * high, 2)},  // h = (1 + z/4)⁴
      {{Kind::exp}, 1.0 / (low * low)},                                  // h = ln z
      {{Kind::logit}, 0.0963},                                           // max of p(1−p)(1−2p): √3/18
      {{Kind::yeo_johnson, {0.5}}, 0.5},                                 // h = (1 + z/2)² − 1
  };
  const double within = variance_within(e, slice_means(e, kMostResiduals));
  for (const Row& row : rows) {
    const double exact = mean_over(row.form, e, eta);
    const double ours = Smearing(row.form, as_vector(e), Eigen::VectorXd()).mean(eta);
    INFO(forms::label(row.form, "y"));
    CHECK(std::abs(ours - exact) <= 0.5 * row.curvature * within + 1e-13);
    CHECK(std::abs(ours - exact) <= 1e-3 * std::abs(exact));
  }
}

TEST_CASE("backtransform: weighted ln beyond 1,001 residuals stays within a ten-thousandth",
          "[backtransform][property]") {
  const auto e = heavy_tailed(20000, 0.1, 11);
  const Eigen::VectorXd w = Eigen::VectorXd::Constant(20000, 2.0);
  const Smearing weighted({Kind::ln}, as_vector(e), w);
  CHECK(weighted.mean(1.0, 2.0) == Approx(mean_over({Kind::ln}, e, 1.0)).epsilon(1e-4));
}

TEST_CASE("backtransform: closed forms use every residual", "[backtransform][property]") {
  const auto e = heavy_tailed(5000, 0.3, 13);
  for (const Kind kind : {Kind::ln, Kind::log10, Kind::sqrt, Kind::cube_root, Kind::asinh, Kind::identity}) {
    const Smearing smearing({kind}, as_vector(e), Eigen::VectorXd());
    for (const double eta : {-0.2, 0.0, 0.5, 3.0}) {
      CHECK(smearing.mean(eta) == Approx(mean_over({kind}, e, eta)).epsilon(1e-12));
    }
  }
  const forms::Form halves{Kind::yeo_johnson, {0.0}};
  CHECK(Smearing(halves, as_vector(e), Eigen::VectorXd()).mean(0.3) ==
        Approx(mean_over(halves, e, 0.3)).epsilon(1e-12));
  // Weighted sqrt, on both sides of the edge: weights of 4 halve the residuals of a row of weight 16.
  const Smearing weighted({Kind::sqrt}, as_vector(e), Eigen::VectorXd::Constant(5000, 4.0));
  std::vector<double> halved = e;
  for (double& value : halved) value /= 2.0;
  for (const double eta : {-0.1, 0.1, 2.0}) {
    CHECK(weighted.mean(eta, 16.0) == Approx(mean_over({Kind::sqrt}, halved, eta)).epsilon(1e-12));
  }
}

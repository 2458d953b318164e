// Own-units figures of the worked cases, in the sample and over the given folds. Values: tests/reference/cases, NumPy
// 1.24.2 and, where the case has 25 digits, mpmath.
#include "backtransform/backtransform.hpp"
#include "backtransform/normal_theory.hpp"
#include "fit/least_squares.hpp"
#include "reference/comparison.hpp"
#include "reference/worked_case.hpp"

#include <catch2/catch.hpp>

#include <limits>
#include <map>
#include <set>

namespace {

using namespace formsieve;
using reference::Comparison;
using reference::WorkedCase;

/// Relative difference that is tolerated; each test prints what is reached.
constexpr double kTolerated = 1e-11;

forms::Form response_form(const WorkedCase& worked) {
  const reference::FormSpec spec = worked.response_form();
  static const std::map<std::string, forms::Kind> kinds{
      {"identity", forms::Kind::identity}, {"sqrt", forms::Kind::sqrt}, {"square", forms::Kind::square},
      {"cbrt", forms::Kind::cube_root},    {"ln", forms::Kind::ln},     {"reciprocal", forms::Kind::reciprocal},
      {"boxcox", forms::Kind::box_cox},
  };
  forms::Form form{kinds.at(spec.form)};
  if (spec.lambda) form.parameters = {*spec.lambda};
  form.reflect = spec.anchor;
  form.shift = spec.shift;
  return form;
}

double weight_of(const Eigen::VectorXd& weights, Eigen::Index i) { return weights.size() == 0 ? 1.0 : weights(i); }

/// The figures of one set of own-units predictions; all NaN when one of them is.
struct Figures {
  double rmse, mae, bias, r2;
};
Figures figures_of(const Eigen::VectorXd& predicted, const Eigen::VectorXd& measured) {
  const Eigen::ArrayXd error = predicted - measured;
  const double tss = (measured.array() - measured.mean()).square().sum();
  return {std::sqrt(error.square().mean()), error.abs().mean(), error.mean(), 1.0 - error.square().sum() / tss};
}

void compare_figures(Comparison& compare, const WorkedCase& worked, const std::string& block,
                     const Eigen::VectorXd& predicted) {
  const Eigen::VectorXd measured = worked.response_own();
  INFO(worked.id() << " " << block);
  if (!worked.figure(block + ".rmse")) {  // null: some argument lies beyond an open edge
    CHECK(predicted.array().isNaN().any());
    return;
  }
  REQUIRE(predicted.array().isFinite().all());
  const Figures ours = figures_of(predicted, measured);
  // Errors cancel in the bias, their rounding does not: it is that of the response.
  const double unit = measured.cwiseAbs().maxCoeff() * 1e-2;
  compare.check(worked, block + ".rmse", ours.rmse);
  compare.check(worked, block + ".mae", ours.mae);
  compare.check(worked, block + ".bias", ours.bias, worked.figure(block + ".bias").value(), unit);
  compare.check(worked, block + ".r2", ours.r2);
}

struct Predictions {
  Eigen::VectorXd mean_own, naive_own, normal_own, eta;
  double nearest_edge_sd = std::numeric_limits<double>::infinity();  ///< smallest η over its residual sd
};

/// √rss/df of a training part; a case of as many rows as coefficients has none.
double sigma_of(const Eigen::VectorXd& residuals, const Eigen::VectorXd& weights, Eigen::Index p) {
  double rss = 0.0;
  for (Eigen::Index i = 0; i < residuals.size(); ++i) rss += weight_of(weights, i) * residuals(i) * residuals(i);
  return std::sqrt(rss / static_cast<double>(residuals.size() - p));
}

/// Held-out predictions over the given folds: coefficients and smearing from the training rows alone.
Predictions held_out(const WorkedCase& worked) {
  const Eigen::MatrixXd x = worked.design();
  const Eigen::VectorXd z = worked.response(), w = worked.weights();
  const std::vector<int> folds = worked.folds();
  Predictions out{Eigen::VectorXd(z.size()), Eigen::VectorXd(z.size()), Eigen::VectorXd(z.size()),
                  Eigen::VectorXd(z.size())};
  for (const int fold : std::set<int>(folds.begin(), folds.end())) {
    std::vector<Eigen::Index> training;
    for (std::size_t i = 0; i < folds.size(); ++i) {
      if (folds[i] != fold) training.push_back(static_cast<Eigen::Index>(i));
    }
    Eigen::VectorXd w_training;
    if (w.size() != 0) w_training = w(training);
    const auto fitted = fit::quick_fit(x(training, Eigen::all), z(training), w_training);
    REQUIRE(fitted.ok());
    const backtransform::Smearing smearing(response_form(worked), fitted->residuals, w_training);
    const double sigma = sigma_of(fitted->residuals, w_training, x.cols());
    const backtransform::NormalMean normal(response_form(worked), sigma);
    for (Eigen::Index i = 0; i < z.size(); ++i) {
      if (folds[static_cast<std::size_t>(i)] != fold) continue;
      out.eta(i) = x.row(i).dot(fitted->coefficients);
      out.mean_own(i) = smearing.mean(out.eta(i), weight_of(w, i));
      out.naive_own(i) = smearing.naive(out.eta(i));
      out.normal_own(i) = normal(out.eta(i), weight_of(w, i));
      out.nearest_edge_sd = std::min(out.nearest_edge_sd, out.eta(i) / sigma * std::sqrt(weight_of(w, i)));
    }
  }
  return out;
}

}  // namespace

TEST_CASE("backtransform: worked cases give the own-units figures in the sample", "[backtransform][reference]") {
  Comparison compare(kTolerated);
  for (const WorkedCase& worked : reference::worked_cases()) {
    const Eigen::VectorXd w = worked.weights();
    const auto fitted = fit::least_squares(worked.design(), worked.response(), w);
    REQUIRE(fitted.ok());
    const backtransform::Smearing smearing(response_form(worked), fitted->residuals, w);
    Eigen::VectorXd mean(fitted->fitted.size()), naive(fitted->fitted.size());
    for (Eigen::Index i = 0; i < mean.size(); ++i) {
      mean(i) = smearing.mean(fitted->fitted(i), weight_of(w, i));
      naive(i) = smearing.naive(fitted->fitted(i));
    }
    compare_figures(compare, worked, "natural_in_sample.smearing_clamped", mean);
    compare_figures(compare, worked, "natural_in_sample.naive_clamped", naive);
    if (const auto factor = worked.figure("smearing_factor")) {
      REQUIRE(smearing.constant_factor());
      compare.check(worked, "smearing_factor", *smearing.constant_factor(), *factor);
    } else {
      CHECK_FALSE(smearing.constant_factor());
    }
  }
  compare.report();
}

TEST_CASE("backtransform: worked cases give the cross-validated own-units figures", "[backtransform][reference]") {
  Comparison compare(kTolerated);
  for (const WorkedCase& worked : reference::worked_cases()) {
    if (worked.folds().empty()) continue;
    const Predictions out = held_out(worked);
    const double rmse_form =
        std::sqrt((out.eta - worked.response()).squaredNorm() / static_cast<double>(out.eta.size()));
    compare.check(worked, "cv.rmse_transformed", rmse_form, worked.figure("cv.rmse_transformed").value());
    compare_figures(compare, worked, "cv.natural.smearing_clamped", out.mean_own);
    compare_figures(compare, worked, "cv.natural.naive_clamped", out.naive_own);
  }
  compare.report();
}

/// The cases take the normal mean of sqrt as η² + s², without an edge at 0: the same where η is well above it.
bool has_the_same_normal_mean(const WorkedCase& worked, double nearest_edge_sd) {
  return response_form(worked).kind != forms::Kind::sqrt || nearest_edge_sd > 8.0;
}

TEST_CASE("backtransform: worked cases give the normal-theory figures", "[backtransform][reference]") {
  Comparison compare(kTolerated);
  std::size_t in_sample = 0, held = 0;
  for (const WorkedCase& worked : reference::worked_cases()) {
    const Eigen::VectorXd w = worked.weights();
    const auto fitted = fit::least_squares(worked.design(), worked.response(), w);
    REQUIRE(fitted.ok());
    const backtransform::NormalMean normal(response_form(worked), fitted->sigma);
    Eigen::VectorXd mean(fitted->fitted.size());
    double nearest_edge_sd = std::numeric_limits<double>::infinity();
    for (Eigen::Index i = 0; i < mean.size(); ++i) {
      mean(i) = normal(fitted->fitted(i), weight_of(w, i));
      nearest_edge_sd = std::min(nearest_edge_sd, fitted->fitted(i) / fitted->sigma * std::sqrt(weight_of(w, i)));
    }
    if (worked.figure("natural_in_sample.normal.rmse") && has_the_same_normal_mean(worked, nearest_edge_sd)) {
      compare_figures(compare, worked, "natural_in_sample.normal", mean);
      ++in_sample;
    }
    if (const auto factor = worked.figure("normal_factor"))
      compare.check(worked, "normal_factor", std::exp(0.5 * fitted->sigma * fitted->sigma), *factor);
    if (worked.folds().empty() || !worked.figure("cv.natural.normal.rmse")) continue;
    const Predictions out = held_out(worked);
    if (!has_the_same_normal_mean(worked, out.nearest_edge_sd)) continue;
    compare_figures(compare, worked, "cv.natural.normal", out.normal_own);
    ++held;
  }
  CHECK(in_sample >= 19);
  CHECK(held >= 18);
  compare.report();
}

TEST_CASE("backtransform: worked cases agree with their 25-digit figures", "[backtransform][reference]") {
  Comparison compare(kTolerated);
  // Strict figures, which exist where no argument leaves the inverse's domain; clamping then changes nothing.
  std::size_t compared = 0;
  for (const WorkedCase& worked : reference::worked_cases()) {
    if (worked.folds().empty()) continue;
    const auto smearing = worked.figure("cv.natural.smearing.rmse");
    const auto naive = worked.figure("cv.natural.naive.rmse");
    const Predictions out = held_out(worked);
    if (smearing) {
      compare.check(worked, "cv.natural.smearing.rmse", figures_of(out.mean_own, worked.response_own()).rmse,
                    *smearing);
      ++compared;
    }
    if (naive)
      compare.check(worked, "cv.natural.naive.rmse", figures_of(out.naive_own, worked.response_own()).rmse, *naive);
  }
  CHECK(compared >= 20);
  compare.report();
}

TEST_CASE("backtransform: the Jacobian of the worked cases' response forms", "[backtransform][reference]") {
  Comparison compare(kTolerated);
  for (const WorkedCase& worked : reference::worked_cases()) {
    const forms::Form form = response_form(worked);
    double total = 0.0;
    for (const double y : worked.response_own()) total += forms::log_abs_derivative(form, y);
    compare.check(worked, "log Jacobian", total, worked.figure("likelihood.log_jacobian").value(), 1e-3);
  }
  compare.report();
}

#include "judge/judge.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>

namespace formsieve::judge {

namespace {

constexpr double kUndefined = std::numeric_limits<double>::quiet_NaN();

/// Held-out predictions that own what a HeldOut refers to. Measured values are 0, so predictions are errors.
struct Example {
  std::vector<double> measured, mean, naive, form;
  std::vector<std::vector<std::uint32_t>> fold_of;
  std::size_t n_folds;

  Example(std::vector<double> errors, std::vector<std::vector<std::uint32_t>> folds, std::size_t count)
      : measured(folds.front().size(), 0.0),
        mean(std::move(errors)),
        naive(mean),
        form(mean),
        fold_of(std::move(folds)),
        n_folds(count) {}

  CrossValidation judged() const {
    HeldOut held_out{measured, measured, mean, naive, form, {}, n_folds};
    for (const auto& folds : fold_of) held_out.fold_of.emplace_back(folds);
    return cross_validation(held_out);
  }
};

}  // namespace

TEST_CASE("judge: cross-validation gives the figures worked by hand", "[judge][unit]") {
  // folds {1, −1}, {2, 4}, {−3, 3}: squared means 1, 10, 9; pooled 40/6
  const CrossValidation cv = Example({1, -1, 2, 4, -3, 3}, {{0, 0, 1, 1, 2, 2}}, 3).judged();
  CHECK(cv.fold_mse == std::vector<double>{1.0, 10.0, 9.0});
  CHECK(cv.rmse.value() == Approx(std::sqrt(40.0 / 6.0)).epsilon(1e-15));
  CHECK(cv.bias.value() == Approx(1.0).epsilon(1e-15));
  CHECK(cv.mae.value() == Approx(14.0 / 6.0).epsilon(1e-15));
  CHECK(cv.mae_median.value() == Approx(2.5).epsilon(1e-15));  // 1 1 2 3 3 4
  CHECK(cv.n_undefined == 0);
  // sd of 1, 10, 9 over √3, by the delta method over 2·rmse
  const double mean = 20.0 / 3.0;
  const double sd = std::sqrt((std::pow(1 - mean, 2) + std::pow(10 - mean, 2) + std::pow(9 - mean, 2)) / 2.0);
  CHECK(cv.rmse_se.value() == Approx(sd / std::sqrt(3.0) / (2.0 * std::sqrt(mean))).epsilon(1e-14));
}

TEST_CASE("judge: cross-validation weighs folds of unequal size by their rows", "[judge][unit]") {
  // folds of 1, 2 and 3 rows with squared means 9, 4, 1: pooled (9 + 8 + 3)/6 = 10/3
  const CrossValidation cv = Example({3, 2, -2, 1, 1, -1}, {{0, 1, 1, 2, 2, 2}}, 3).judged();
  CHECK(cv.rmse.value() == Approx(std::sqrt(10.0 / 3.0)).epsilon(1e-15));
  // 3/2 · Σ (n_f/6)² (mse_f − 10/3)²
  const double variance = 1.5 * (std::pow(17.0 / 18.0, 2) + std::pow(2.0 / 9.0, 2) + std::pow(-7.0 / 6.0, 2));
  CHECK(cv.rmse_se.value() == Approx(std::sqrt(variance) / (2.0 * std::sqrt(10.0 / 3.0))).epsilon(1e-14));
}

TEST_CASE("judge: cross-validation does not shrink its standard error with repeats", "[judge][unit]") {
  const Example once({1, -1, 2, 4, -3, 3}, {{0, 0, 1, 1, 2, 2}}, 3);
  const Example twice({1, -1, 2, 4, -3, 3, 1, -1, 2, 4, -3, 3}, {{0, 0, 1, 1, 2, 2}, {0, 0, 1, 1, 2, 2}}, 3);
  CHECK(twice.judged().rmse.value() == Approx(once.judged().rmse.value()).epsilon(1e-15));
  CHECK(twice.judged().rmse_se.value() == Approx(once.judged().rmse_se.value()).epsilon(1e-14));
  CHECK(twice.judged().fold_mse.size() == 6);
}

TEST_CASE("judge: cross-validation takes each repeat's own folds", "[judge][unit]") {
  // repeat 2 deals {0, 1, 0, 1}: squared means (1 + 9)/2 and (4 + 16)/2
  const CrossValidation cv = Example({1, 1, 2, 2, 1, 2, 3, 4}, {{0, 0, 1, 1}, {0, 1, 0, 1}}, 2).judged();
  CHECK(cv.fold_mse == std::vector<double>{1.0, 4.0, 5.0, 10.0});
  CHECK(cv.rmse.value() == Approx(std::sqrt(40.0 / 8.0)).epsilon(1e-15));
}

TEST_CASE("judge: cross-validation is unset when a held-out prediction is undefined", "[judge][unit]") {
  Example example({1, kUndefined, 2, 4, kUndefined, 3}, {{0, 0, 1, 1, 2, 2}}, 3);
  example.form = {1, 1, 1, 1, 1, 1};
  example.naive = {2, 2, 2, 2, 2, 2};
  const CrossValidation cv = example.judged();
  CHECK(cv.n_undefined == 2);
  CHECK_FALSE(cv.rmse);
  CHECK_FALSE(cv.rmse_se);
  CHECK_FALSE(cv.bias);
  CHECK_FALSE(cv.mae);
  CHECK_FALSE(cv.mae_median);
  CHECK(std::isnan(cv.fold_mse[0]));
  CHECK(cv.fold_mse[1] == 10.0);
  CHECK(std::isnan(cv.fold_mse[2]));
  CHECK(cv.rmse_naive.value() == 2.0);
  CHECK(cv.rmse_form_scale == 1.0);
  CHECK(cv.bias_form_scale == 1.0);
}

TEST_CASE("judge: cross-validation counts a prediction too large to square as undefined", "[judge][unit]") {
  const CrossValidation cv = Example({1, 1e200}, {{0, 1}}, 2).judged();
  CHECK(cv.n_undefined == 1);
  CHECK_FALSE(cv.rmse);
}

TEST_CASE("judge: cross-validation keeps the naive figure apart", "[judge][unit]") {
  Example example({1, 1, 1, 1}, {{0, 0, 1, 1}}, 2);
  example.naive = {3, kUndefined, 3, 3};
  CHECK_FALSE(example.judged().rmse_naive);
  CHECK(example.judged().rmse.value() == 1.0);
  example.naive[1] = -3;
  CHECK(example.judged().rmse_naive.value() == 3.0);
}

TEST_CASE("judge: cross-validation of perfect predictions has no error and no standard error", "[judge][unit]") {
  const CrossValidation cv = Example({0, 0, 0, 0}, {{0, 0, 1, 1}}, 2).judged();
  CHECK(cv.rmse.value() == 0.0);
  CHECK(cv.rmse_se.value() == 0.0);
}

TEST_CASE("judge: cross-validation ignores empty folds, and has no standard error with one fold left",
          "[judge][unit]") {
  const CrossValidation gap = Example({1, -1, 2, 4}, {{0, 0, 2, 2}}, 3).judged();
  const CrossValidation two = Example({1, -1, 2, 4}, {{0, 0, 1, 1}}, 2).judged();
  CHECK(gap.rmse_se.value() == Approx(two.rmse_se.value()).epsilon(1e-15));
  const CrossValidation one = Example({1, -1}, {{0, 0}}, 2).judged();
  CHECK(one.rmse.value() == 1.0);
  CHECK_FALSE(one.rmse_se);
}

}  // namespace formsieve::judge

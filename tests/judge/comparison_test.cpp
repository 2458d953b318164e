// Candidates side by side. Values from outside: tests/reference/comparison (NumPy, SciPy, statsmodels).
#include "judge/comparison.hpp"

#include <nlohmann/json.hpp>

#include <catch2/catch.hpp>

#include <cmath>
#include <fstream>
#include <limits>
#include <random>

namespace formsieve::judge {

namespace {

nlohmann::json reference() {
  std::ifstream file(std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/comparison/pairs.json");
  return nlohmann::json::parse(file);
}

CrossValidation errors(std::vector<double> fold_mse) {
  CrossValidation cv;
  double sum = 0.0;
  for (const double mse : fold_mse) sum += mse;
  cv.rmse = std::sqrt(sum / static_cast<double>(fold_mse.size()));
  cv.fold_mse = std::move(fold_mse);
  return cv;
}

std::vector<double> densities(std::uint32_t seed, std::size_t n) {
  std::mt19937 random(seed);
  std::normal_distribution<double> normal(-3.0, 1.0);
  std::vector<double> values(n);
  for (double& value : values) value = normal(random);
  return values;
}

bool has(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }

}  // namespace

TEST_CASE("judge: the corrected resampled t agrees with SciPy", "[judge][reference]") {
  const auto values = reference();  // kept while its parts are looked at
  for (const auto& expected : values.at("folds")) {
    const CrossValidation first = errors(expected.at("first")), second = errors(expected.at("second"));
    const FoldDifference found = fold_difference(first, second, expected.at("n_folds"));
    REQUIRE(found.t);
    CHECK(*found.mse == Approx(expected.at("mse").get<double>()).epsilon(1e-12));
    CHECK(*found.mse_se == Approx(expected.at("mse_se").get<double>()).epsilon(1e-12));
    CHECK(*found.t == Approx(expected.at("t").get<double>()).epsilon(1e-12));
    CHECK(*found.df == expected.at("df").get<double>());
    CHECK(*found.p == Approx(expected.at("p").get<double>()).epsilon(1e-10));
    CHECK(found.beyond_noise == (expected.at("p").get<double>() < 0.05));
    CHECK(*found.rmse_se * (*first.rmse + *second.rmse) == Approx(*found.mse_se));
  }
}

TEST_CASE("judge: exchanging the candidates turns every sign and nothing else", "[judge][property]") {
  for (std::uint32_t seed = 0; seed < 20; ++seed) {
    const CrossValidation a = errors({4.0 + seed, 6.0, 5.0, 7.5}), b = errors({5.0, 5.5, 8.0, 7.0});
    const FoldDifference there = fold_difference(a, b, 4), back = fold_difference(b, a, 4);
    CHECK(*there.t == -*back.t);
    CHECK(*there.rmse == -*back.rmse);
    CHECK(*there.p == *back.p);
    CHECK(there.n_first_lower == back.n_second_lower);
    const auto left = densities(seed, 40), right = densities(seed + 100, 40);
    const LikelihoodDifference ahead = vuong(left, right, 4, 7), behind = vuong(right, left, 7, 4);
    CHECK(*ahead.z == Approx(-*behind.z));
    CHECK(*ahead.z_aic == Approx(-*behind.z_aic));
    CHECK(*ahead.z_bic == Approx(-*behind.z_bic));
    CHECK(*ahead.p_bic == Approx(*behind.p_bic));
    CHECK(*ahead.z_aic < *ahead.z);  // the second pays for its three parameters more
    CHECK(*ahead.z_bic < *ahead.z_aic);
  }
}

TEST_CASE("judge: a candidate beside itself shows no difference", "[judge][property]") {
  const CrossValidation one = errors({4.0, 6.0, 5.0});
  FoldDifference folds = fold_difference(one, one, 3);
  CHECK(*folds.mse == 0.0);
  CHECK_FALSE(folds.t);
  CHECK_FALSE(folds.beyond_noise);
  put_in_words(folds, "rank 1", "rank 2");
  CHECK(has(folds.words, "the same in every fold"));
  const auto values = densities(3, 30);
  LikelihoodDifference likelihood = vuong(values, values, 4, 4);
  CHECK(likelihood.log_likelihood == 0.0);
  CHECK_FALSE(likelihood.z);
  put_in_words(likelihood, "rank 1", "rank 2");
  CHECK(has(likelihood.words, "cannot be compared row by row"));
  const auto parted = disagreement(values, values, values, 2.0);
  REQUIRE(parted);
  CHECK(parted->root_mean_square_own == 0.0);
  CHECK(*parted->difference_rel == 0.0);
}

TEST_CASE("judge: folds without an error are left out of the pairs", "[judge][unit]") {
  CrossValidation a = errors({4.0, 6.0, 5.0, 9.0}), b = errors({5.0, 8.0, 5.5, 7.0});
  a.fold_mse[3] = std::nan("");
  const FoldDifference found = fold_difference(a, b, 4);
  CHECK(found.n_folds == 3);
  CHECK(*found.mse == Approx(3.5 / 3.0));
  CHECK(*found.df == 2.0);
  a.fold_mse.assign(4, std::nan(""));
  CHECK_FALSE(fold_difference(a, b, 4).mse);
}

TEST_CASE("judge: the Vuong statistic has no value where a density has none", "[judge][unit]") {
  auto left = densities(1, 10), right = densities(2, 10);
  right[4] = -std::numeric_limits<double>::infinity();
  CHECK_FALSE(vuong(left, right, 3, 3).z);
}

TEST_CASE("judge: a penalty without a difference between rows is not more than noise", "[judge][unit]") {
  const auto left = densities(5, 400);
  auto twin = left, better = left;
  for (std::size_t i = 0; i < left.size(); ++i) {
    twin[i] += i % 2 == 0 ? 0.001 : -0.001;
    better[i] += i % 2 == 0 ? 0.5 : 0.1;
  }
  LikelihoodDifference found = vuong(left, twin, 7, 4);
  CHECK(*found.p_bic < 0.001);
  CHECK_FALSE(found.beyond_noise);
  put_in_words(found, "rank 1", "rank 2");
  CHECK(has(found.words, "what speaks for rank 2 is its smaller number of coefficients alone"));
  found = vuong(left, better, 4, 4);
  CHECK(found.beyond_noise);
  put_in_words(found, "rank 1", "rank 2");
  CHECK(has(found.words, "speaks for rank 2 (Vuong z 30, p below 0.001"));
}

TEST_CASE("judge: pointwise densities of a weighted fit are those of normal errors with variance over weight",
          "[judge][unit]") {
  const std::vector<double> residuals{0.5, -1.0, 0.25, 0.75}, weights{1.0, 2.0, 4.0, 0.5}, slopes{0.1, 0.2, 0.3, 0.4};
  const double variance = (0.25 + 2.0 + 0.25 + 0.28125) / 4.0;
  const auto found = pointwise_log_likelihood(residuals, weights, slopes);
  for (std::size_t i = 0; i < 4; ++i) {
    const double sd = std::sqrt(variance / weights[i]), z = residuals[i] / sd;
    CHECK(found[i] ==
          Approx(std::log(std::exp(-0.5 * z * z) / (sd * std::sqrt(2.0 * 3.14159265358979324))) + slopes[i]));
  }
}

TEST_CASE("judge: the larger of nested fits is found on either side", "[judge][unit]") {
  LikelihoodDifference there = nested_f(120.0, 100.0, 3, 4, 30), back = nested_f(100.0, 120.0, 4, 3, 30);
  CHECK(there.nesting == Nesting::first_in_second);
  CHECK(back.nesting == Nesting::second_in_first);
  CHECK(*there.f == Approx(20.0 / (100.0 / 26.0)));
  CHECK(*back.f == *there.f);
  CHECK(there.log_likelihood == Approx(15.0 * std::log(1.2)));
  CHECK(back.log_likelihood == Approx(-there.log_likelihood));
  put_in_words(there, "rank 9", "rank 4");
  CHECK(has(there.words, "Rank 9 is rank 4 with less in it"));
  put_in_words(back, "rank 4", "rank 9");
  CHECK(has(back.words, "Rank 9 is rank 4 with less in it"));
  CHECK(nested_f(100.0, 100.0, 4, 4, 30).nesting == Nesting::same);
  CHECK_FALSE(nested_f(5.0, 0.0, 3, 4, 30).f);
}

TEST_CASE("judge: predictions part most where they differ most, in own units and CV RMSE", "[judge][unit]") {
  const std::vector<double> a{10.0, 20.0, 30.0}, b{11.0, 16.0, 30.0}, measured{9.0, 21.0, 28.0};
  const auto found = disagreement(a, b, measured, 2.0);
  REQUIRE(found);
  CHECK(found->row == 1);
  CHECK(found->measured_own == 21.0);
  CHECK(*found->difference_rel == -2.0);
  CHECK(found->root_mean_square_own == Approx(std::sqrt(17.0 / 3.0)));
  CHECK_FALSE(disagreement(std::vector<double>{1.0, std::nan("")}, b, measured, 2.0));
}

TEST_CASE("judge: words say more than noise exactly where the test says so", "[judge][unit]") {
  FoldDifference folds = fold_difference(errors({4.0, 6.0, 5.0, 7.0}), errors({9.0, 11.1, 10.0, 12.0}), 4);
  put_in_words(folds, "rank 1", "rank 2");
  CHECK(folds.beyond_noise);
  CHECK(has(folds.words, "Rank 2 has a higher CV RMSE"));
  CHECK(has(folds.words, "That is more than fold noise."));
  folds = fold_difference(errors({4.0, 6.0, 5.0, 7.0}), errors({9.0, 2.0, 10.0, 3.0}), 4);
  put_in_words(folds, "rank 1", "rank 2");
  CHECK_FALSE(folds.beyond_noise);
  CHECK(has(folds.words, "better one in 2 of 4 folds. That is no more than fold noise."));
  LinearLogTest test;
  test.p_linear = 0.001;
  test.p_log = 0.4;
  put_in_words(test, "rank 1", "rank 2");
  CHECK(has(test.words, "That speaks for rank 2."));
  test.p_log = 0.001;
  put_in_words(test, "rank 1", "rank 2");
  CHECK(has(test.words, "Neither form stands"));
}

TEST_CASE("judge: the bias that is left is held against the noise of a mean", "[judge][unit]") {
  Candidate one;
  one.n = 100;
  one.cv.rmse = 50.0;
  one.back.used = "smearing";
  one.back.corrections = {{"smearing", 1.1, 12.0, 50.0, std::nullopt, ""}};
  CHECK(*remaining_bias(one).bias_rel == Approx(0.24));
  CHECK(has(remaining_bias(one).words, "too much on average, 24 % of its CV RMSE: more than chance leaves (± 10)"));
  one.back.corrections[0].cv_bias = -9.0;
  CHECK(has(remaining_bias(one).words, "too little on average, 18 % of its CV RMSE: no more than chance leaves"));
}

}  // namespace formsieve::judge

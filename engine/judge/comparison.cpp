#include "judge/comparison.hpp"

#include "base/sums.hpp"
#include "judge/selection.hpp"

#include <boost/math/distributions/fisher_f.hpp>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/distributions/students_t.hpp>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace formsieve::judge {

namespace {

constexpr double kTail = 1.0 - kNoise;

double p_of_z(double z) { return 2.0 * boost::math::cdf(boost::math::complement(boost::math::normal(), std::abs(z))); }

/// Differences of the folds in which both errors exist.
std::vector<double> differences(std::span<const double> first, std::span<const double> second) {
  std::vector<double> result;
  for (std::size_t f = 0; f < std::min(first.size(), second.size()); ++f)
    if (std::isfinite(second[f] - first[f])) result.push_back(second[f] - first[f]);
  return result;
}

void set_t(const std::vector<double>& difference, std::size_t n_folds, FoldDifference& result) {
  const auto n = static_cast<double>(difference.size());
  const double test_over_train = 1.0 / (static_cast<double>(n_folds) - 1.0);
  const double variance = base::sum_of_squares(difference, *result.mse) / (n - 1.0);
  result.mse_se = std::sqrt((1.0 / n + test_over_train) * variance);
  if (!(*result.mse_se > 0.0)) return;
  result.t = *result.mse / *result.mse_se;
  result.df = n - 1.0;
  result.p = p_of_t(*result.t, *result.df);
  result.beyond_noise = *result.p < kTail;
}

void set_z(double sum, double penalty, double root, std::optional<double>& z, std::optional<double>& p) {
  z = (sum - penalty) / root;
  p = p_of_z(*z);
}

}  // namespace

double p_of_t(double t, double df) {
  return 2.0 * boost::math::cdf(boost::math::complement(boost::math::students_t(df), std::abs(t)));
}

FoldDifference fold_difference(const CrossValidation& first, const CrossValidation& second, std::size_t n_folds) {
  FoldDifference result;
  const std::vector<double> difference = differences(first.fold_mse, second.fold_mse);
  result.n_folds = difference.size();
  for (const double one : difference) {
    if (one > 0.0) ++result.n_first_lower;
    if (one < 0.0) ++result.n_second_lower;
  }
  if (!difference.empty()) result.mse = base::mean(difference);
  if (first.rmse && second.rmse) result.rmse = *second.rmse - *first.rmse;
  if (difference.size() < 2 || n_folds < 2) return result;
  set_t(difference, n_folds, result);
  // MSE₂ − MSE₁ = (RMSE₂ − RMSE₁)(RMSE₂ + RMSE₁)
  if (result.rmse && *first.rmse + *second.rmse > 0.0) result.rmse_se = *result.mse_se / (*first.rmse + *second.rmse);
  return result;
}

std::vector<double> pointwise_log_likelihood(std::span<const double> residuals, std::span<const double> weights,
                                             std::span<const double> log_derivative) {
  const std::size_t n = residuals.size();
  std::vector<double> square(n);
  for (std::size_t i = 0; i < n; ++i) square[i] = residuals[i] * residuals[i] * (weights.empty() ? 1.0 : weights[i]);
  const double variance = base::sum(square) / static_cast<double>(n);
  std::vector<double> density(n);
  for (std::size_t i = 0; i < n; ++i) {
    const double log_weight = weights.empty() ? 0.0 : std::log(weights[i]);
    density[i] =
        -0.5 * (std::log(2.0 * std::numbers::pi * variance) - log_weight + square[i] / variance) + log_derivative[i];
  }
  return density;
}

LikelihoodDifference vuong(std::span<const double> first, std::span<const double> second, std::size_t q_first,
                           std::size_t q_second) {
  LikelihoodDifference result;
  std::vector<double> difference(first.size());
  for (std::size_t i = 0; i < first.size(); ++i) difference[i] = second[i] - first[i];
  const auto n = static_cast<double>(difference.size());
  result.log_likelihood = base::sum(difference);
  const double omega = std::sqrt(base::sum_of_squares(difference, base::mean(difference)) / n);
  if (!std::isfinite(result.log_likelihood) || !(omega > 0.0)) return result;
  const double root = std::sqrt(n) * omega;
  const double more = static_cast<double>(q_second) - static_cast<double>(q_first);
  set_z(result.log_likelihood, 0.0, root, result.z, result.p);
  set_z(result.log_likelihood, more, root, result.z_aic, result.p_aic);
  set_z(result.log_likelihood, 0.5 * more * std::log(n), root, result.z_bic, result.p_bic);
  // The penalty is no evidence of the rows: between near-twins ω is small and the penalty alone would look like much.
  result.beyond_noise = *result.p < kTail && *result.p_bic<kTail&& * result.z* * result.z_bic> 0.0;
  return result;
}

LikelihoodDifference nested_f(double rss_first, double rss_second, std::size_t k_first, std::size_t k_second,
                              std::size_t n) {
  LikelihoodDifference result;
  result.log_likelihood = 0.5 * static_cast<double>(n) * std::log(rss_first / rss_second);
  if (k_first == k_second) {
    result.nesting = Nesting::same;
    result.log_likelihood = 0.0;
    return result;
  }
  const bool first_smaller = k_first < k_second;
  result.nesting = first_smaller ? Nesting::first_in_second : Nesting::second_in_first;
  const double small = first_smaller ? rss_first : rss_second, large = first_smaller ? rss_second : rss_first;
  const std::size_t k_large = std::max(k_first, k_second);
  if (n <= k_large || !(large > 0.0)) return result;
  result.df = static_cast<double>(k_large - std::min(k_first, k_second));
  result.df2 = static_cast<double>(n - k_large);
  result.f = std::max(0.0, small - large) / *result.df / (large / *result.df2);
  result.p_f = boost::math::cdf(boost::math::complement(boost::math::fisher_f(*result.df, *result.df2), *result.f));
  result.beyond_noise = *result.p_f < kTail;
  return result;
}

std::optional<Disagreement> disagreement(std::span<const double> first, std::span<const double> second,
                                         std::span<const double> measured, std::optional<double> scale) {
  Disagreement result;
  result.root_mean_square_own = root_mean_squared_difference(first, second);
  if (!std::isfinite(result.root_mean_square_own)) return std::nullopt;
  for (std::size_t i = 1; i < first.size(); ++i)
    if (std::abs(second[i] - first[i]) > std::abs(second[result.row] - first[result.row])) result.row = i;
  result.measured_own = measured[result.row];
  result.first_own = first[result.row];
  result.second_own = second[result.row];
  if (scale && *scale > 0.0) {
    result.root_mean_square_rel = result.root_mean_square_own / *scale;
    result.difference_rel = (result.second_own - result.first_own) / *scale;
  }
  return result;
}

}  // namespace formsieve::judge

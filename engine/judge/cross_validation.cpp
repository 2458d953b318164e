#include "judge/judge.hpp"

#include "base/sums.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::judge {

namespace {

/// Errors predicted − measured of every held-out row; not finite where the prediction, or its square, is.
std::vector<double> errors_of(std::span<const double> predicted, std::span<const double> measured) {
  std::vector<double> errors(predicted.size());
  for (std::size_t i = 0; i < predicted.size(); ++i) errors[i] = predicted[i] - measured[i % measured.size()];
  return errors;
}

bool usable(double error) { return std::isfinite(error * error); }

bool all_usable(const std::vector<double>& errors) { return std::all_of(errors.begin(), errors.end(), usable); }

double mean_square(std::span<const double> errors) {
  return base::sum_of_squares(errors, 0.0) / static_cast<double>(errors.size());
}

double median_of(std::vector<double> values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return 0.5 * (*std::max_element(values.begin(), middle) + *middle);
}

/// Errors of one fold in one repeat, in row order.
std::vector<double> errors_of_fold(const HeldOut& held_out, const std::vector<double>& errors, std::size_t repeat,
                                   std::size_t fold) {
  const std::size_t n = held_out.measured_own.size();
  std::vector<double> part;
  for (std::size_t i = 0; i < n; ++i)
    if (held_out.fold_of[repeat][i] == fold) part.push_back(errors[repeat * n + i]);
  return part;
}

struct FoldErrors {
  std::vector<double> mse;   ///< [repeats × folds]; NaN where a prediction is undefined or the fold is empty
  std::vector<double> rows;  ///< rows in each
};

FoldErrors by_fold(const HeldOut& held_out, const std::vector<double>& errors) {
  FoldErrors folds;
  for (std::size_t repeat = 0; repeat < held_out.fold_of.size(); ++repeat)
    for (std::size_t fold = 0; fold < held_out.n_folds; ++fold) {
      const auto part = errors_of_fold(held_out, errors, repeat, fold);
      const bool defined = !part.empty() && all_usable(part);
      folds.mse.push_back(defined ? mean_square(part) : std::numeric_limits<double>::quiet_NaN());
      folds.rows.push_back(static_cast<double>(part.size()));
    }
  return folds;
}

/// Variance of the pooled mean squared error of one repeat, folds taken as independent clusters of unequal size
/// (Cochran 1977, section 11.8, ratio estimate): K/(K−1) · Σ (n_f/n)² (mse_f − mse)², which is the variance of the
/// fold values over K when the folds are equal. Unset for fewer than two folds with rows.
std::optional<double> variance_of_pooled(std::span<const double> mse, std::span<const double> rows) {
  double total_rows = 0.0;
  double pooled = 0.0;
  double used = 0.0;
  for (std::size_t f = 0; f < mse.size(); ++f) {
    if (rows[f] == 0.0) continue;
    total_rows += rows[f];
    pooled += rows[f] * mse[f];
    used += 1.0;
  }
  if (used < 2.0) return std::nullopt;
  pooled /= total_rows;
  double sum = 0.0;
  for (std::size_t f = 0; f < mse.size(); ++f)
    if (rows[f] > 0.0) sum += std::pow(rows[f] / total_rows * (mse[f] - pooled), 2);
  return used / (used - 1.0) * sum;
}

/// Standard error of √MSE by the delta method: se(MSE)/(2√MSE). Over repeats the variances are averaged, not divided:
/// repeats deal the same rows anew and bring no new ones.
std::optional<double> rmse_standard_error(const FoldErrors& folds, std::size_t n_folds, double rmse) {
  const std::size_t repeats = folds.mse.size() / n_folds;
  double variance = 0.0;
  for (std::size_t repeat = 0; repeat < repeats; ++repeat) {
    const auto one = variance_of_pooled(std::span(folds.mse).subspan(repeat * n_folds, n_folds),
                                        std::span(folds.rows).subspan(repeat * n_folds, n_folds));
    if (!one) return std::nullopt;
    variance += *one / static_cast<double>(repeats);
  }
  return rmse > 0.0 ? std::sqrt(variance) / (2.0 * rmse) : 0.0;
}

void set_own_units(const HeldOut& held_out, const std::vector<double>& errors, CrossValidation& result) {
  const FoldErrors folds = by_fold(held_out, errors);
  result.fold_mse = folds.mse;
  result.n_undefined = errors.size() - static_cast<std::size_t>(std::count_if(errors.begin(), errors.end(), usable));
  if (errors.empty() || result.n_undefined > 0) return;
  std::vector<double> sizes(errors.size());
  std::transform(errors.begin(), errors.end(), sizes.begin(), [](double error) { return std::abs(error); });
  result.rmse = std::sqrt(mean_square(errors));
  result.rmse_se = rmse_standard_error(folds, held_out.n_folds, *result.rmse);
  result.bias = base::mean(errors);
  result.mae = base::mean(sizes);
  result.mae_median = median_of(std::move(sizes));
}

}  // namespace

CrossValidation cross_validation(const HeldOut& held_out) {
  CrossValidation result;
  set_own_units(held_out, errors_of(held_out.mean_own, held_out.measured_own), result);
  const auto naive = errors_of(held_out.naive_own, held_out.measured_own);
  if (!naive.empty() && all_usable(naive)) result.rmse_naive = std::sqrt(mean_square(naive));
  const auto form = errors_of(held_out.predicted_form, held_out.measured_form);
  if (form.empty()) return result;
  result.rmse_form_scale = std::sqrt(mean_square(form));
  result.bias_form_scale = base::mean(form);
  return result;
}

}  // namespace formsieve::judge

// Statistics of two candidates side by side. The first of a pair is the reference; differences are second less first.
#pragma once

#include <formsieve/comparison.hpp>

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::judge {

/// Share of its distribution in the middle of which a statistic counts as noise: common practice.
inline constexpr double kNoise = 0.95;

/// Paired differences of the fold-wise mean squared errors d_f (Nadeau & Bengio 2003, section 5.1):
///
///     t = d̄ / √((1/J + n_test/n_train) s²),    J − 1 degrees of freedom,
///
/// with J = folds × repeats and n_test/n_train = 1/(folds − 1). Reads CrossValidation::fold_mse of both, [J] on the
/// same folds; folds without an error are left out. Cost O(J).
FoldDifference fold_difference(const CrossValidation& first, const CrossValidation& second, std::size_t n_folds);

/// ln density of each measured value, own units: −½ ln(2πσ²/w) − w e²/(2σ²) + ln|g′(y)| with the maximum-likelihood
/// σ² = Σ w e²/n. Sums to fit::own_scale_likelihood. `residuals`, `log_derivative` [n]; `weights` [n] or empty.
std::vector<double> pointwise_log_likelihood(std::span<const double> residuals, std::span<const double> weights,
                                             std::span<const double> log_derivative);

/// Vuong 1989, section 5, from pointwise ln densities m = second − first [n]: z = Σm / (√n·ω), ω² the variance of m;
/// the corrected ones take from Σm the difference of the penalties, q for AIC and ½ q ln n for BIC. z unset where ω is
/// zero or a density is not finite. `q_…`: parameters with the variance.
LikelihoodDifference vuong(std::span<const double> first, std::span<const double> second, std::size_t q_first,
                           std::size_t q_second);

/// F test of the columns that the larger of two nested candidates adds. Weighted residual sums of squares and columns
/// with the intercept of both; `n` rows. Unset where the larger leaves no degrees of freedom or no residual.
LikelihoodDifference nested_f(double rss_first, double rss_second, std::size_t k_first, std::size_t k_second,
                              std::size_t n);

/// Two-sided p-value of a t statistic.
double p_of_t(double t, double df);

/// Predictions [n] in own units beside each other; `scale` is the lower CV RMSE. Leaves line and values. Unset where a
/// prediction is not finite on every row.
std::optional<Disagreement> disagreement(std::span<const double> first, std::span<const double> second,
                                         std::span<const double> measured, std::optional<double> scale);

/// What the correction in use leaves, judged against √(CV RMSE²/n), the noise of a mean.
RemainingBias remaining_bias(const Candidate& candidate);

/// The plain sentences. `first`, `second` name the candidates, "rank 1".
void put_in_words(FoldDifference& folds, const std::string& first, const std::string& second);
void put_in_words(LikelihoodDifference& likelihood, const std::string& first, const std::string& second);
void put_in_words(LinearLogTest& test, const std::string& first, const std::string& second);
void put_in_words(Disagreement& disagreement, const std::string& first, const std::string& second);

}  // namespace formsieve::judge

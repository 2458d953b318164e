// Sums over rows with one fixed order of additions, so that the same values give the same bits everywhere.
#pragma once

#include <cstddef>
#include <span>

namespace formsieve::base {

/// Rows that one chunk of a row sum covers; fixed, so that no sum depends on threads or cache sizes.
inline constexpr std::size_t kRowChunk = 1024;

/// Σ x_i by compensated summation (Neumaier 1974): error about one rounding of the result plus n·ε² of Σ|x_i|.
double sum(std::span<const double> x);
/// Σ x_i / n; NaN when empty.
double mean(std::span<const double> x);
/// Σ w_i x_i / Σ w_i; `weights` empty for the plain mean.
double weighted_mean(std::span<const double> x, std::span<const double> weights);
/// Σ (x_i − centre)², compensated.
double sum_of_squares(std::span<const double> x, double centre);

}  // namespace formsieve::base

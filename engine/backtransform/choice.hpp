// Which correction is used and why, and what predicting a mean rather than a median amounts to, in words.
#pragma once

#include "backtransform/corrections.hpp"

#include <array>
#include <optional>
#include <span>
#include <string>

namespace formsieve::backtransform {

/// Held-out predictions of one candidate. Flattened repeats × rows: entry r·n + i belongs to row i in repeat r.
struct HeldOutMeans {
  std::span<const double> eta;        ///< [repeats · n] form's scale
  std::span<const double> measured;   ///< [n] own units
  std::span<const double> smeared;    ///< [repeats · n] own units
  std::span<const double> by_thirds;  ///< [repeats · n] own units
};

/// Mean of predicted − measured within the thirds of the held-out predictions `eta`, and its standard error (the
/// repeats of a row counted as one).
struct ThirdsBias {
  std::array<double, 3> bias{}, standard_error{};
  double root_mean_square() const;
  double chi_squared() const;  ///< Σ (bias/standard error)², about 3 when there is no bias
};
/// Unset where a prediction is undefined or there are fewer than 3 · kSmallestThird rows. Cost O(n log n).
std::optional<ThirdsBias> bias_by_thirds(const HeldOutMeans& held, std::span<const double> predicted);

/// The bias that smearing leaves within thirds is beyond chance above this: the 95 % point of χ² with 3 degrees of
/// freedom.
inline constexpr double kBiasBeyondChance = 7.815;
/// Thirds must leave at most this share of it: three factors have three times the variance of one and make a longer
/// equation, which a small gain does not pay for.
inline constexpr double kLeftByThirds = 0.5;

struct Choice {
  Method used = Method::smearing;
  std::string why;  ///< one sentence
};
/// Smearing, by which candidates are ranked, unless the check of equal spread is broken, the held-out bias that
/// smearing leaves within the thirds of the predictions is beyond chance (kBiasBeyondChance), and smearing within
/// thirds leaves at most half of it in root mean square (kLeftByThirds).
Choice choose(bool spread_broken, const HeldOutMeans& held);
/// The same where nothing is to be chosen: the response as measured.
Choice choice_of_identity();

/// "The uncorrected prediction is a median: on these rows it is 2.9 % (123 in own units) below the mean on average".
/// `mean` and `uncorrected`: averages over the rows in use, own units; NaN where undefined.
std::string mean_median_words(const forms::Form& response, double mean, double uncorrected);

}  // namespace formsieve::backtransform

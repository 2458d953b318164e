// The power that makes one positive column most nearly normal.
#pragma once

#include <optional>
#include <span>
#include <vector>

namespace formsieve::survey {

/// Powers outside are of no use in an equation; a maximum beyond an end is reported as that end.
inline constexpr double kLowestLambda = -3.0;
inline constexpr double kHighestLambda = 3.0;

/// Profile log-likelihood of λ for one column of positive finite values x, up to a constant:
///
///     ℓ(λ) = −(n/2)·ln v(λ),   v the variance of ((x/g)^λ − 1)/λ, or of ln(x/g) for λ = 0,
///
/// with g the geometric mean, which takes the place of the Jacobian (Box & Cox 1964, section 3).
class BoxCoxLikelihood {
 public:
  explicit BoxCoxLikelihood(std::span<const double> positive);

  /// Finite for every λ in [−3, 3] unless the values are equal. Cost O(n).
  double operator()(double lambda) const;

 private:
  std::vector<double> logs_;  ///< ln(x/g)
  double largest_log_ = 0.0, smallest_log_ = 0.0;
};

/// The λ in [−3, 3] with the largest profile likelihood, by Brent's minimiser (Brent 1973, section 5.8) to about seven
/// decimals. Unset when fewer than three values are distinct, for which no power can be preferred. Cost about 20
/// evaluations of the likelihood.
std::optional<double> box_cox_lambda(std::span<const double> sorted_positive);

}  // namespace formsieve::survey

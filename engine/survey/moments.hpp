// Moments of one set of values, computed about a value near their mean and scaled by powers of two, so that neither a
// large mean nor values near the ends of the number range spoil them.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::survey {

struct Moments {
  std::size_t n = 0;
  double mean = 0.0;
  double sd = 0.0;               ///< divisor n − 1; infinite where it exceeds the largest double
  double skewness = 0.0;         ///< G1 = √(n(n−1))/(n−2) · m3/m2^1.5
  double excess_kurtosis = 0.0;  ///< G2 = (n−1)/((n−2)(n−3)) · ((n+1)·g2 + 6), g2 = m4/m2² − 3
};

/// Mean, standard deviation and the small-sample skewness G1 and excess kurtosis G2 (Joanes & Gill 1998, section 2).
/// `values` must be finite. What has no value is 0: everything when empty, sd when n < 2, G1 when n < 3, G2 when n < 4,
/// and all three when the values are equal. Cost O(n), one copy.
Moments moments(std::span<const double> values);

/// The values centred at their mean and divided by a power of two that brings the largest deviation to between 1 and 2.
struct Deviations {
  std::vector<double> values;  ///< [n]; all zero when the input is constant
  double scale = 1.0;          ///< a deviation in the input's units is `values[i] · scale` …
  double base = 1.0;           ///< … times `base`: two factors, since their product may leave the number range
  double mean = 0.0;           ///< in the input's units
};

/// Two passes: about a first mean, then about the mean of those deviations. `values` must be finite.
Deviations deviations(std::span<const double> values);

}  // namespace formsieve::survey

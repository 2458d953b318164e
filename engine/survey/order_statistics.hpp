// Quartiles and outlying values of one set of values.
#pragma once

#include <cstddef>
#include <span>

namespace formsieve::survey {

/// Sample quantile of sorted, finite values by linear interpolation (Hyndman & Fan 1996, type 7). `probability` in
/// [0, 1]; `sorted` must not be empty. Cost O(1).
double quantile(std::span<const double> sorted, double probability);

/// Number of distinct values among sorted ones. Cost O(n).
std::size_t count_distinct(std::span<const double> sorted);

struct Outlying {
  std::size_t n = 0;
  bool by_mean_deviation = false;  ///< the median absolute deviation is 0: see below
};

/// Values with |0.6745·(x − median)/MAD| > 3.5 (Iglewicz & Hoaglin 1993, section 3). Where more than half of the values
/// are equal, MAD is 0 and their mean absolute deviation takes its place as |x − median|/(1.253314·mean AD) > 3.5
/// (common practice). Fewer than three distinct values have no outlying ones. `sorted` finite. Cost O(n).
Outlying count_outlying(std::span<const double> sorted);

}  // namespace formsieve::survey

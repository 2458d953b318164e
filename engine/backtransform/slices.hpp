// Private to room backtransform: many residuals condensed to a few of their quantiles.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::backtransform {

/// Means of `n_slices` equal slices of the empirical distribution of `sorted` (rising, more than n_slices values):
/// slice k is the mean of the quantile function over [k, k + 1]/n_slices, a value on a boundary counting for its share
/// on either side. Their mean is that of all values; averaging a function h over them instead errs by at most ½·max|h″|
/// times the mean variance within a slice. Cost O(n).
std::vector<double> slice_means(std::span<const double> sorted, std::size_t n_slices);

}  // namespace formsieve::backtransform

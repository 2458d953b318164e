// The fineness with which a column was written down.
#pragma once

#include <span>

namespace formsieve::survey {

/// The largest power of ten, at most 1, of which every value is a whole multiple: 1 for whole numbers, 0.01 for amounts
/// in cents. Looks at up to 15 decimals, and forgives the rounding of decimal fractions to binary and of a few
/// additions of them. 0 when there is no such power or no value. Does not depend on the order of the values, which must
/// be finite. Cost O(n).
double resolution(std::span<const double> values);

}  // namespace formsieve::survey

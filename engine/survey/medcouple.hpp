// The medcouple, a measure of skewness that a few outlying values cannot move.
#pragma once

#include <span>

namespace formsieve::survey {

/// Medcouple of sorted, finite values (Brys, Hubert & Struyf 2004, section 2): the median, over all pairs of a value x
/// at or above the median m and a value y at or below it, of
///
///     h(x, y) = ((x − m) − (m − y)) / (x − y),
///
/// where pairs of values that both equal m count −1, 0 or 1 by the antisymmetric rule of the paper, and a median of an
/// even number of pairs is the mean of the middle two. Between −1 and 1, positive when skewed to the right; 0 when
/// there are no values.
///
/// The pairs form a matrix with sorted rows and columns, of which only O(n) entries are ever looked at in one pass. A
/// pass counts the entries below a trial value, the trial value is bisected, and as soon as O(n) entries are left they
/// are listed and the wanted one selected. Cost O(n log n), O(n) memory; at most 120 passes whatever the values.
double medcouple(std::span<const double> sorted);

}  // namespace formsieve::survey

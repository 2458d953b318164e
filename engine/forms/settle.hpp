// Anchors and shifts that fit a column, shared by plans and default menus.
#pragma once

#include <formsieve/forms.hpp>

#include <cstddef>

namespace formsieve::forms {

/// The largest value or declared upper bound plus one unit (design.md, "The plan").
double auto_reflect(const ColumnFacts& facts);

/// What makes the smallest u 1 for the ln and reciprocal families and 0 for roots; 0 for every other form.
double auto_shift(const Form& form, const ColumnFacts& facts);

/// Half of one unit of the resolution: what a recorded zero may hide. Half of 1 when the resolution is unknown.
double half_unit(const ColumnFacts& facts);

/// Level indicators: the most frequent level as reference, levels on fewer than `rare_level_count` rows pooled when
/// there are at least two of them.
Form settle_levels(const ColumnFacts& facts, std::size_t rare_level_count);

}  // namespace formsieve::forms

// What each form would do to one numeric column.
#pragma once

#include <formsieve/survey.hpp>

#include <span>
#include <vector>

namespace formsieve::survey {

enum class Role { predictor, response };

/// The plain forms (logit and arcsine-root for shares only), the shifted ones that zeros or negatives call for, the
/// reflected ones that a left tail calls for, and the default menu's own; of a column of two values, identity alone.
/// Each is either possible, with the skewness that it leaves, or carries the reason and the repair. Those that
/// `forms::default_menu` (or its response counterpart) suggests and that are not nearly equal to a simpler one are
/// marked. `present`: the column's values, finite and not empty. Cost O(forms · n).
std::vector<FormTrial> try_forms(const forms::ColumnFacts& facts, std::span<const double> present, Role role);

}  // namespace formsieve::survey

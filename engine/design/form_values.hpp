// Values of forms for sums over many rows.
#pragma once

#include <formsieve/forms.hpp>

#include <span>

namespace formsieve::design {

/// As forms::evaluate_column, faster where logarithms are taken: within four units in the last place of it, and not the
/// same bits on every instruction set. For sums that choose among candidates, not for what is reported.
void values_for_sums(const forms::Form& form, std::span<const double> x, std::span<double> out);

}  // namespace formsieve::design

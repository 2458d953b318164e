// The forms of room forms as formulas. Private to room report.
#pragma once

#include "report/code_expression.hpp"

#include <formsieve/forms.hpp>

#include <vector>

namespace formsieve::report {

/// The kind whose function of u this form is: power ½ is sqrt, Box–Cox 0 is ln.
forms::Kind plain_kind(const forms::Form& form);

/// The n_columns(form) design columns at `x`, the raw value; for levels 0 or 1 where `x` is a known text.
std::vector<Expression> column_formulas(const forms::Form& form, const Expression& x);

/// What must hold of `x` for the columns to be defined: a finite number inside the domain, a known level.
Expression defined_where(const forms::Form& form, const Expression& x);

/// The argument u that a response form had, from its value `z`: forms::inverse without reflection and shift. Undefined
/// beyond an open edge of the image; a value beyond a closed one is moved there.
Expression inverse_formula(const forms::Form& form, const Expression& z);

/// Own units from the argument u: reflection and shift undone.
Expression own_units(const forms::Form& response, const Expression& u);

}  // namespace formsieve::report

// Column spaces in a normal form, so that equal ones compare equal.
#pragma once

#include <formsieve/forms.hpp>

namespace formsieve::forms {

/// As equivalent(), on the rows of a column: there Yeo-Johnson of one sign is a Box-Cox form.
bool equivalent_on(const Form& a, const Form& b, const ColumnFacts& facts);

}  // namespace formsieve::forms

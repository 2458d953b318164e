// Forms read back from our JSON files. Private to room report.
#pragma once

#include <formsieve/forms.hpp>

#include "report/json_reader.hpp"

namespace formsieve::report {

/// The inverse of form_json. Trouble: a name that is no form, parameters or levels that do not go with it.
forms::Form read_form(const Node& node);

}  // namespace formsieve::report

// Checks of what a caller asks of a survey against the table.
#pragma once

#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

namespace formsieve::survey {

/// Errors (kind data): a column that the table does not have in `ignore`, `response` or `bounds`; bounds the wrong way
/// round or on text; a value outside its column's bounds, the earliest row of the first such column. Ignored columns
/// may break theirs.
Status check_options(const table::Table& table, const Options& options);

}  // namespace formsieve::survey

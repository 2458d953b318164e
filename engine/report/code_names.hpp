// Names of columns as names in a program. Private to room report.
#pragma once

#include "report/code_formula.hpp"

#include <string>
#include <vector>

namespace formsieve::report {

/// Gives each input a name that C and Python both take: other signs than ASCII letters, digits and _ become _, a first
/// digit gets x_ in front, words and functions of the languages get _ behind, equal names are numbered.
void name_inputs(std::vector<Input>& inputs);

/// Text fit for one line of a comment: control characters become blanks.
std::string one_line_text(const std::string& text);

}  // namespace formsieve::report

// What is said above an equation in any language. Private to room report.
#pragma once

#include "report/code_formula.hpp"

#include <formsieve/model.hpp>

#include <string>
#include <vector>

namespace formsieve::report {

/// One sentence or two a line: which candidate, what it returns, the ranges seen, the cautions, then `notes`. Inputs
/// are named as `inputs` says where that differs from the column.
std::vector<std::string> comment_lines(const model::ModelSet& set, const model::Model& model,
                                       const std::vector<Input>& inputs, const std::vector<std::string>& notes);

/// The lines with `mark` in front of each, safe from signs that end or continue a comment.
std::string commented(const std::vector<std::string>& lines, const std::string& mark);

}  // namespace formsieve::report

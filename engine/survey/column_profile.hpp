// The profile of one column, of numbers or of text.
#pragma once

#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "survey/trials.hpp"

namespace formsieve::survey {

/// As profile_numbers() of the public header, with response forms tried when `role` says so; a response is never set
/// aside.
ColumnProfile profile_number_column(const std::string& name, std::vector<double> values,
                                    std::optional<std::pair<double, double>> bounds, Role role);

/// Levels, the most frequent first, ties by first appearance; levels on fewer than `rare_level_count` rows are pooled
/// by the suggested form, and a note names them.
ColumnProfile profile_text_column(const table::Column& column, std::size_t rare_level_count);

}  // namespace formsieve::survey

// Columns that cannot serve as predictors, whatever form they take.
#pragma once

#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::survey {

/// Text with more levels than this share of its rows is set aside: on average a level then has fewer than two rows, and
/// its indicator describes a row rather than a kind of row. Common practice in spirit, the figure a judgement.
inline constexpr double kMostLevelsPerRow = 0.5;

/// Rows of each level of a text column, in the order of `column.levels`. Cost O(n).
std::vector<std::size_t> count_levels(const table::Column& column);

/// Why numbers cannot serve: there are none, or they are all equal. `present` without NaN.
std::optional<std::string> unusable_reason(std::span<const double> present);

/// Why text cannot serve: no value, one level, levels that nearly number the rows, or rare levels
/// alone.
std::optional<std::string> unusable_reason(const table::Column& column, std::size_t rare_level_count);

/// Columns of `included` (indices into the table) that repeat an earlier one, or the response wherever it stands, in
/// every row: reasons by column name, naming the twin. Text columns are twins when their levels go one to one. The
/// response itself is never listed. Cost O(cells).
std::map<std::string, std::string> twin_reasons(const table::Table& table, const std::vector<std::size_t>& included,
                                                const std::string& response);

/// Columns of the table that `options` do not ignore.
std::vector<std::size_t> included_columns(const table::Table& table, const Options& options);

}  // namespace formsieve::survey

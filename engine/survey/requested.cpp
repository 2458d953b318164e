#include "survey/requested.hpp"

#include <algorithm>

#include "survey/usable.hpp"
#include "survey/words.hpp"

namespace formsieve::survey {

namespace {

constexpr std::size_t kMostColumnsNamed = 12;  ///< in a hint

Error data_error(std::string message, std::string where, std::string hint) {
  return Error{ErrorKind::data, std::move(message), std::move(where), std::move(hint)};
}

Status check_name(const table::Table& table, const std::string& name, const std::string& asked_as) {
  if (table.find(name)) return {};
  std::vector<std::string> known;
  for (const table::Column& column : table.columns) known.push_back(column.name);
  const auto near = nearest_name(name, known);
  return data_error("there is no column '" + name + "' (named as " + asked_as + ")", table.source,
                    near ? "did you mean '" + *near + "'?" : "its columns are " + listed(known, kMostColumnsNamed));
}

Status check_names(const table::Table& table, const Options& options) {
  if (!options.response.empty())
    if (auto status = check_name(table, options.response, "the response"); !status) return status;
  for (const std::string& name : options.ignore)
    if (auto status = check_name(table, name, "a column to ignore"); !status) return status;
  for (const auto& [name, bounds] : options.bounds)
    if (auto status = check_name(table, name, "a column with bounds"); !status) return status;
  return {};
}

std::string bounds_setting(const std::string& column, double low, double high) {
  return "bounds = { " + column + " = [" + literal(low) + ", " + literal(high) + "] }";
}

std::string place_of(const table::Table& table, std::size_t row, const std::string& column) {
  const bool known = row < table.line_of_row.size();
  return table.source +
         (known ? ", line " + std::to_string(table.line_of_row[row]) : ", row " + std::to_string(row + 1)) +
         ", column '" + column + "'";
}

Error broken_bound(const table::Table& table, const table::Column& column, std::size_t row,
                   std::pair<double, double> bounds) {
  const double x = column.numbers[row];
  const bool below = x < bounds.first;
  const double low = std::min(x, bounds.first);
  const double high = std::max(x, bounds.second);
  return data_error("the value " + literal(x) + " of '" + column.name + "' is " +
                        (below ? "below its declared lower bound " + literal(bounds.first)
                               : "above its declared upper bound " + literal(bounds.second)),
                    place_of(table, row, column.name),
                    "correct the value, or widen the bounds: " + bounds_setting(column.name, low, high));
}

Status check_bounds_of(const table::Table& table, const table::Column& column, std::pair<double, double> bounds) {
  const std::string where = table.source + ", column '" + column.name + "'";
  if (column.type == table::ColumnType::text)
    return data_error("bounds are declared for '" + column.name + "', which holds text", where,
                      "take its entry out of bounds");
  if (!(bounds.first < bounds.second))
    return data_error("the bounds of '" + column.name + "' are the wrong way round or not numbers", where,
                      "write the lowest possible value first, as in " + bounds_setting(column.name, 0.0, 100.0));
  const auto broken = std::find_if(column.numbers.begin(), column.numbers.end(),
                                   [&](double x) { return x < bounds.first || x > bounds.second; });
  if (broken == column.numbers.end()) return {};
  return broken_bound(table, column, static_cast<std::size_t>(broken - column.numbers.begin()), bounds);
}

}  // namespace

Status check_options(const table::Table& table, const Options& options) {
  if (auto status = check_names(table, options); !status) return status;
  for (const std::size_t index : included_columns(table, options)) {
    const table::Column& column = table.columns[index];
    const auto bounds = options.bounds.find(column.name);
    if (bounds == options.bounds.end()) continue;
    if (auto status = check_bounds_of(table, column, bounds->second); !status) return status;
  }
  return {};
}

}  // namespace formsieve::survey

#include "design/design.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::design {

namespace {

bool is_missing(const table::Column& column, std::size_t row) {
  return column.type == table::ColumnType::numeric ? std::isnan(column.numbers[row])
                                                   : column.codes[row] == table::kMissingLevel;
}

/// Indices of the wanted columns in table order, each once.
Result<std::vector<std::size_t>> find_columns(const table::Table& table, std::span<const std::string> columns) {
  std::vector<std::size_t> found;
  for (const std::string& name : columns) {
    const auto index = table.find(name);
    if (!index)
      return Error{ErrorKind::data, "there is no column '" + name + "'", table.source,
                   "name a column of the table, exactly as its header writes it"};
    found.push_back(*index);
  }
  std::sort(found.begin(), found.end());
  found.erase(std::unique(found.begin(), found.end()), found.end());
  return found;
}

Error no_complete_row(const table::Table& table, const RowSet& set) {
  Error error{ErrorKind::data, "no row has a value in every column that is needed", table.source, ""};
  const auto worst = std::max_element(set.dropped.begin(), set.dropped.end(),
                                      [](const auto& a, const auto& b) { return a.second < b.second; });
  if (worst != set.dropped.end())
    error.hint = "leave out '" + worst->first + "', where " + std::to_string(worst->second) + " of " +
                 std::to_string(table.n_rows) + " rows are missing: ignore = [\"" + worst->first + "\"]";
  return error;
}

}  // namespace

Result<RowSet> complete_rows(const table::Table& table, std::span<const std::string> columns) {
  const auto needed = find_columns(table, columns);
  if (!needed) return needed.error();
  RowSet set;
  std::vector<std::size_t> dropped(needed->size(), 0);
  for (std::size_t row = 0; row < table.n_rows; ++row) {
    const auto first_missing =
        std::find_if(needed->begin(), needed->end(), [&](std::size_t c) { return is_missing(table.columns[c], row); });
    if (first_missing == needed->end())
      set.rows.push_back(row);
    else
      ++dropped[static_cast<std::size_t>(first_missing - needed->begin())];
  }
  for (std::size_t i = 0; i < dropped.size(); ++i)
    if (dropped[i] > 0) set.dropped.emplace_back(table.columns[(*needed)[i]].name, dropped[i]);
  if (set.rows.empty()) return no_complete_row(table, set);
  return set;
}

}  // namespace formsieve::design

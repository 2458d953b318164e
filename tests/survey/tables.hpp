// Small tables in memory.
#pragma once

#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::survey::testing {

inline constexpr double kMissing = std::numeric_limits<double>::quiet_NaN();

inline table::Column numbers(std::string name, std::vector<double> values) {
  table::Column column;
  column.name = std::move(name);
  column.n_missing =
      static_cast<std::size_t>(std::count_if(values.begin(), values.end(), [](double x) { return std::isnan(x); }));
  column.numbers = std::move(values);
  return column;
}

/// The empty string is missing.
inline table::Column texts(std::string name, const std::vector<std::string>& values) {
  table::Column column;
  column.name = std::move(name);
  column.type = table::ColumnType::text;
  for (const std::string& value : values) {
    if (value.empty()) {
      column.codes.push_back(table::kMissingLevel);
      ++column.n_missing;
      continue;
    }
    const auto known = std::find(column.levels.begin(), column.levels.end(), value);
    column.codes.push_back(static_cast<std::uint32_t>(known - column.levels.begin()));
    if (known == column.levels.end()) column.levels.push_back(value);
  }
  return column;
}

inline table::Table table_of(std::vector<table::Column> columns) {
  table::Table table;
  table.source = "stores.csv";
  table.sha256 = "ab12";
  table.n_rows = std::max(columns.at(0).numbers.size(), columns.at(0).codes.size());
  table.columns = std::move(columns);
  for (std::size_t row = 0; row < table.n_rows; ++row) table.line_of_row.push_back(row + 2);
  return table;
}

inline bool has_note(const ColumnProfile& profile, const std::string& text) {
  return std::any_of(profile.notes.begin(), profile.notes.end(),
                     [&](const std::string& note) { return note.find(text) != std::string::npos; });
}

}  // namespace formsieve::survey::testing

// Short ways to read a table from text in a test and to look at it.
#pragma once

#include "table/csv_parser.hpp"

#include <catch2/catch.hpp>

#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table::test {

/// Reads `text`, which must be a valid table.
inline Table read_valid(std::string_view text, const CsvOptions& options = {}) {
  Result<Table> table = parse_csv(text, "test.csv", options);
  if (!table) FAIL(table.error().message + " (" + table.error().where + ")");
  return std::move(*table);
}

/// Reads `text`, which must be refused.
inline Error read_invalid(std::string_view text, const CsvOptions& options = {}) {
  const Result<Table> table = parse_csv(text, "test.csv", options);
  REQUIRE_FALSE(table.ok());
  return table.error();
}

/// The cells of a text column as texts; a missing cell is "<missing>".
inline std::vector<std::string> texts(const Column& column) {
  REQUIRE(column.type == ColumnType::text);
  std::vector<std::string> cells;
  for (const std::uint32_t code : column.codes)
    cells.push_back(code == kMissingLevel ? "<missing>" : column.levels.at(code));
  return cells;
}

}  // namespace formsieve::table::test

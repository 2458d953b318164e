#include "design/design.hpp"

#include <catch2/catch.hpp>

#include <limits>

using namespace formsieve;

namespace {

constexpr double kMissing = std::numeric_limits<double>::quiet_NaN();

table::Column numbers(const std::string& name, std::vector<double> values) {
  table::Column column;
  column.name = name;
  column.numbers = std::move(values);
  return column;
}

/// area is missing on rows 1 and 4, site on 1 and 2, rain on 3, and spare everywhere.
table::Table example() {
  table::Table table;
  table.source = "stores.csv";
  table.n_rows = 6;
  table::Column site;
  site.name = "site";
  site.type = table::ColumnType::text;
  site.levels = {"north", "south"};
  site.codes = {0, table::kMissingLevel, table::kMissingLevel, 1, 0, 0};
  table.columns = {numbers("area", {1, kMissing, 3, 4, kMissing, 6}), site, numbers("rain", {1, 2, 3, kMissing, 5, 6}),
                   numbers("spare", std::vector<double>(6, kMissing))};
  return table;
}

}  // namespace

TEST_CASE("design: rows are those complete in every needed column", "[design][unit]") {
  const std::vector<std::string> needed = {"rain", "area", "site", "area"};
  const auto set = design::complete_rows(example(), needed);
  REQUIRE(set.ok());
  CHECK(set->rows == std::vector<std::size_t>{0, 5});
  // row 1 lacks area and site: counted for area, which comes first in the table
  using Dropped = std::vector<std::pair<std::string, std::size_t>>;
  CHECK(set->dropped == Dropped{{"area", 2}, {"site", 1}, {"rain", 1}});
}

TEST_CASE("design: rows drop nothing for a column that is not needed", "[design][unit]") {
  const std::vector<std::string> needed = {"rain"};
  const auto set = design::complete_rows(example(), needed);
  REQUIRE(set.ok());
  CHECK(set->rows.size() == 5);
  CHECK(set->dropped.size() == 1);
}

TEST_CASE("design: rows report a table without a complete row and the column to leave out", "[design][unit]") {
  const std::vector<std::string> needed = {"area", "spare"};
  const auto set = design::complete_rows(example(), needed);
  REQUIRE_FALSE(set.ok());
  CHECK(set.error().kind == ErrorKind::data);
  CHECK(set.error().where == "stores.csv");
  CHECK(set.error().hint.find("'spare'") != std::string::npos);
}

TEST_CASE("design: rows report a column that does not exist", "[design][unit]") {
  const std::vector<std::string> needed = {"area", "aera"};
  const auto set = design::complete_rows(example(), needed);
  REQUIRE_FALSE(set.ok());
  CHECK(set.error().message == "there is no column 'aera'");
}

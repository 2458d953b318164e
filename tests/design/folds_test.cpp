#include "example.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <limits>
#include <map>
#include <set>

using namespace formsieve;
using design::FoldKind;
using design::FoldRequest;
using FoldOf = std::vector<std::uint32_t>;

namespace {

table::Column number_column(std::vector<double> values) {
  table::Column column;
  column.name = "key";
  column.numbers = std::move(values);
  return column;
}

table::Column text_column(const std::vector<std::string>& values) {
  table::Column column;
  column.name = "key";
  column.type = table::ColumnType::text;
  for (const auto& value : values) {
    const auto found = std::find(column.levels.begin(), column.levels.end(), value);
    column.codes.push_back(static_cast<std::uint32_t>(found - column.levels.begin()));
    if (found == column.levels.end()) column.levels.push_back(value);
  }
  return column;
}

std::vector<std::size_t> sizes(const FoldOf& fold_of, std::size_t n_folds) {
  std::vector<std::size_t> result(n_folds, 0);
  for (const auto fold : fold_of) ++result.at(fold);
  return result;
}

}  // namespace

TEST_CASE("design: shuffled folds are the same on every machine", "[design][reference]") {
  // folds_reference.py, Python 3.11.2
  FoldRequest request;
  request.count = 4;
  request.repeats = 2;
  const auto folds = design::make_folds(test::all_rows(13), request);
  REQUIRE(folds.ok());
  CHECK(folds->kind == FoldKind::shuffled);
  CHECK(folds->seed == 20261201);
  CHECK(folds->fold_of[0] == FoldOf{3, 0, 0, 2, 3, 1, 3, 2, 1, 1, 0, 2, 0});
  CHECK(folds->fold_of[1] == FoldOf{3, 2, 1, 3, 1, 2, 0, 0, 3, 1, 0, 0, 2});
}

TEST_CASE("design: shuffled folds differ in size by at most one row and in every repeat", "[design][property]") {
  FoldRequest request;
  request.repeats = 5;
  for (const std::size_t n : {10u, 11u, 97u, 1000u}) {
    const auto folds = design::make_folds(test::all_rows(n), request);
    REQUIRE(folds.ok());
    REQUIRE(folds->fold_of.size() == 5);
    CHECK(folds->remarks.empty());
    CHECK(std::set<FoldOf>(folds->fold_of.begin(), folds->fold_of.end()).size() == 5);
    for (const auto& fold_of : folds->fold_of) {
      const auto size = sizes(fold_of, 10);
      CHECK(*std::max_element(size.begin(), size.end()) - *std::min_element(size.begin(), size.end()) <= 1);
    }
  }
}

TEST_CASE("design: shuffled folds follow the seed", "[design][unit]") {
  FoldRequest request;
  const auto first = design::make_folds(test::all_rows(50), request);
  CHECK(design::make_folds(test::all_rows(50), request)->fold_of == first->fold_of);
  request.seed = 1;
  CHECK(design::make_folds(test::all_rows(50), request)->fold_of != first->fold_of);
}

TEST_CASE("design: fewer rows than folds gives one fold a row and a remark", "[design][unit]") {
  const auto folds = design::make_folds(test::all_rows(6), {});
  REQUIRE(folds.ok());
  CHECK(folds->count == 6);
  CHECK(folds->remarks == std::vector<std::string>{"10 folds asked for, 6 rows: 6 used"});
  CHECK(sizes(folds->fold_of[0], 6) == std::vector<std::size_t>(6, 1));
}

TEST_CASE("design: grouped folds keep groups whole and fill the smallest fold", "[design][property]") {
  std::vector<double> group;
  for (int g = 0; g < 17; ++g)
    for (int i = 0; i <= (g * 7) % 5; ++i) group.push_back(g * 1.5);
  const auto column = number_column(group);
  FoldRequest request;
  request.count = 5;
  request.repeats = 3;
  request.group = &column;
  const auto folds = design::make_folds(test::all_rows(group.size()), request);
  REQUIRE(folds.ok());
  CHECK(folds->kind == FoldKind::grouped);
  CHECK(folds->fold_of[0] != folds->fold_of[1]);
  for (const auto& fold_of : folds->fold_of) {
    std::map<double, std::set<std::uint32_t>> of_group;
    for (std::size_t i = 0; i < group.size(); ++i) of_group[group[i]].insert(fold_of[i]);
    for (const auto& [value, in] : of_group) CHECK(in.size() == 1);
    const auto size = sizes(fold_of, 5);
    // no fold can be ahead by more than the largest group
    CHECK(*std::max_element(size.begin(), size.end()) - *std::min_element(size.begin(), size.end()) <= 5);
    CHECK(*std::min_element(size.begin(), size.end()) > 0);
  }
}

TEST_CASE("design: grouped folds by text do not depend on the order of the rows", "[design][property]") {
  const std::vector<std::string> rows = {"c", "a", "b", "a", "d", "c", "e"};
  std::vector<std::string> reversed(rows.rbegin(), rows.rend());
  const auto column = text_column(rows);
  const auto column_reversed = text_column(reversed);
  FoldRequest request;
  request.count = 3;
  request.group = &column;
  FoldOf forward = design::make_folds(test::all_rows(7), request)->fold_of[0];
  request.group = &column_reversed;
  FoldOf backward = design::make_folds(test::all_rows(7), request)->fold_of[0];
  std::reverse(backward.begin(), backward.end());
  CHECK(forward == backward);
}

TEST_CASE("design: fewer groups than folds gives one fold a group and a remark", "[design][unit]") {
  const auto column = text_column({"a", "b", "a", "c", "b"});
  FoldRequest request;
  request.group = &column;
  const auto folds = design::make_folds(test::all_rows(5), request);
  REQUIRE(folds.ok());
  CHECK(folds->count == 3);
  CHECK(folds->remarks == std::vector<std::string>{"10 folds asked for, 3 different values of 'key': 3 used"});
}

TEST_CASE("design: ordered folds are blocks in rising order", "[design][unit]") {
  const auto column = number_column({7, 1, 3, 3, 9, 2, 8, 3});
  FoldRequest request;
  request.count = 3;
  request.order = &column;
  const auto folds = design::make_folds(test::all_rows(8), request);
  REQUIRE(folds.ok());
  CHECK(folds->kind == FoldKind::ordered);
  // rising: rows 1 5 2 3 7 0 6 4, the ties 2 3 7 in table order; blocks of 3, 3 and 2
  CHECK(folds->fold_of[0] == FoldOf{1, 0, 0, 1, 2, 0, 2, 1});
}

TEST_CASE("design: ordered folds take texts by their letters", "[design][unit]") {
  const auto column = text_column({"2024-03", "2023-12", "2024-01", "2023-11"});
  FoldRequest request;
  request.count = 2;
  request.order = &column;
  CHECK(design::make_folds(test::all_rows(4), request)->fold_of[0] == FoldOf{1, 0, 1, 0});
}

TEST_CASE("design: given folds are the distinct values in rising order", "[design][unit]") {
  const auto column = number_column({30, 10, 20, 10, 30});
  FoldRequest request;
  request.given = &column;
  const auto folds = design::make_folds(test::all_rows(5), request);
  REQUIRE(folds.ok());
  CHECK(folds->kind == FoldKind::given);
  CHECK(folds->count == 3);
  CHECK(folds->remarks.empty());
  CHECK(folds->fold_of[0] == FoldOf{2, 0, 1, 0, 2});
}

TEST_CASE("design: folds look up their column by table row", "[design][unit]") {
  const auto column = number_column({9, 1, 9, 2, 9, 1});
  const std::vector<std::size_t> rows = {1, 3, 5};
  FoldRequest request;
  request.given = &column;
  CHECK(design::make_folds(rows, request)->fold_of[0] == FoldOf{0, 1, 0});
}

TEST_CASE("design: folds refuse what cannot be dealt", "[design][unit]") {
  const auto same = number_column({1, 1, 1});
  const auto missing = number_column({1, std::numeric_limits<double>::quiet_NaN(), 2});
  const auto kind_of = [](const FoldRequest& request, std::size_t n = 3) {
    const auto folds = design::make_folds(test::all_rows(n), request);
    REQUIRE_FALSE(folds.ok());
    CHECK_FALSE(folds.error().message.empty());
    return folds.error().kind;
  };
  FoldRequest request;
  CHECK(kind_of(request, 1) == ErrorKind::data);
  CHECK(kind_of(request, 0) == ErrorKind::data);
  request.count = 1;
  CHECK(kind_of(request) == ErrorKind::plan);
  request = {};
  request.repeats = 0;
  CHECK(kind_of(request) == ErrorKind::plan);
  request = {};
  request.group = &same;
  CHECK(kind_of(request) == ErrorKind::data);
  request.order = &same;
  CHECK(kind_of(request) == ErrorKind::plan);
  request = {};
  request.given = &same;
  CHECK(kind_of(request) == ErrorKind::data);
  request.given = &missing;
  CHECK(kind_of(request) == ErrorKind::data);
  request = {};
  request.order = &same;
  request.repeats = 2;
  CHECK(kind_of(request) == ErrorKind::plan);
}

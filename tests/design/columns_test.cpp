#include "example.hpp"

#include <catch2/catch.hpp>

#include <cmath>

using namespace formsieve;

TEST_CASE("design: layout gives each form consecutive columns in plan order", "[design][unit]") {
  const auto data = test::example_data(1, 5, false);
  const auto layout = design::layout(data);
  using Block = std::pair<std::size_t, std::size_t>;
  CHECK(layout.n_columns == 9);
  REQUIRE(layout.block.size() == 3);
  CHECK(layout.block[0] == std::vector<Block>{{0, 1}, {1, 1}, {2, 1}, {3, 1}});
  CHECK(layout.block[1] == std::vector<Block>{{4, 1}, {5, 2}});
  CHECK(layout.block[2] == std::vector<Block>{{7, 2}});
}

TEST_CASE("design: design matrix holds an intercept and the chosen columns of the chosen rows", "[design][unit]") {
  const auto data = test::example_data(2, 8, false);
  const std::vector<std::uint16_t> choice = {3, 2, 1};  // ln(area), quadratic(load), levels(site)
  const std::vector<std::size_t> rows = {6, 0, 3};
  const Eigen::MatrixXd x = design::design_matrix(data, choice, rows);
  REQUIRE(x.rows() == 3);
  REQUIRE(x.cols() == 6);
  for (Eigen::Index i = 0; i < 3; ++i) {
    const std::size_t row = rows[static_cast<std::size_t>(i)];
    const double load = data.predictors[1].raw[row];
    const double site = data.predictors[2].raw[row];
    CHECK(x(i, 0) == 1.0);
    CHECK(x(i, 1) == std::log(data.predictors[0].raw[row]));
    CHECK(x(i, 2) == load);
    CHECK(x(i, 3) == load * load);
    CHECK(x(i, 4) == (site == 1.0 ? 1.0 : 0.0));
    CHECK(x(i, 5) == (site == 2.0 ? 1.0 : 0.0));
  }
}

TEST_CASE("design: design matrix of the empty candidate is the intercept", "[design][unit]") {
  const auto data = test::example_data(3, 4, false);
  const std::vector<std::uint16_t> choice = {0, 0, 0};
  const Eigen::MatrixXd x = design::design_matrix(data, choice, test::all_rows(4));
  CHECK(x == Eigen::MatrixXd::Ones(4, 1));
}

TEST_CASE("design: response vector is the response under its form", "[design][unit]") {
  const auto data = test::example_data(4, 6, false);
  const std::vector<std::size_t> rows = {5, 1};
  CHECK(design::response_vector(data, 0, rows) == Eigen::Vector2d(data.response[5], data.response[1]));
  CHECK(design::response_vector(data, 1, rows)(1) == std::log(data.response[1]));
}

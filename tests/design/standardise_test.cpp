#include "base/sums.hpp"
#include "design/standardise.hpp"
#include "example.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numeric>

using namespace formsieve;
using design::Data;
using design::StandardColumns;
using forms::Kind;
using test::form;

namespace {

/// Standardised values of all rows, [order][n_rows].
std::vector<std::vector<double>> standardised(const Data& data) {
  const auto columns = StandardColumns::fit(data, 1);
  REQUIRE(columns.ok());
  std::vector<std::vector<double>> result(columns->order());
  std::vector<double> block(columns->order() * base::kRowChunk);
  for (std::size_t first = 0; first < data.n_rows; first += base::kRowChunk) {
    std::vector<std::uint32_t> rows(std::min(base::kRowChunk, data.n_rows - first));
    std::iota(rows.begin(), rows.end(), static_cast<std::uint32_t>(first));
    columns->evaluate(data, rows, block);
    for (std::size_t c = 0; c < result.size(); ++c)
      result[c].insert(result[c].end(), block.begin() + static_cast<std::ptrdiff_t>(c * base::kRowChunk),
                       block.begin() + static_cast<std::ptrdiff_t>(c * base::kRowChunk + rows.size()));
  }
  return result;
}

/// Weighted mean of the product of two columns.
double mean_product(const Data& data, const std::vector<double>& a, const std::vector<double>& b) {
  long double sum = 0.0L;
  long double total = 0.0L;
  for (std::size_t i = 0; i < a.size(); ++i) {
    const long double w = data.weights.empty() ? 1.0L : static_cast<long double>(data.weights[i]);
    sum += w * a[i] * b[i];
    total += w;
  }
  return static_cast<double>(sum / total);
}

Data one_predictor(const std::vector<double>& raw, std::vector<forms::Form> menu) {
  Data data;
  data.n_rows = raw.size();
  data.table_row = test::all_rows(raw.size());
  data.response_forms = {form(Kind::identity)};
  std::mt19937_64 random(1);
  for (std::size_t i = 0; i < raw.size(); ++i) data.response.push_back(test::normal(random));
  data.predictors.push_back({"x", false, false, raw, std::move(menu)});
  return data;
}

}  // namespace

TEST_CASE("design: standardised columns have weighted mean 0 and variance 1", "[design][property]") {
  for (const bool weighted : {false, true}) {
    const Data data = test::example_data(21, 2500, weighted);
    const auto columns = standardised(data);
    REQUIRE(columns.size() == 11);
    const std::vector<double> ones(data.n_rows, 1.0);
    for (const auto& column : columns) {
      CHECK(std::abs(mean_product(data, column, ones)) < 1e-13);
      CHECK(mean_product(data, column, column) == Approx(1.0).epsilon(1e-13));
    }
  }
}

TEST_CASE("design: columns of one form are uncorrelated after standardising", "[design][property]") {
  for (const bool weighted : {false, true}) {
    const Data data = test::example_data(22, 2500, weighted);
    const auto columns = standardised(data);
    CHECK(std::abs(mean_product(data, columns[5], columns[6])) < 1e-13);  // quadratic(load)
    CHECK(std::abs(mean_product(data, columns[7], columns[8])) < 1e-13);  // levels(site)
    CHECK(std::abs(mean_product(data, columns[0], columns[1])) > 0.5);    // area and √area are different forms
  }
}

TEST_CASE("design: a nearly collinear form is made orthonormal", "[design][property]") {
  // u and u² about 10^6 with spread 10: the part of u² that u does not give is 1e-11 of its variance
  std::vector<double> raw;
  std::mt19937_64 random(23);
  for (int i = 0; i < 500; ++i) raw.push_back(std::round(1e6 + 10.0 * test::normal(random)));
  const Data data = one_predictor(raw, {form(Kind::quadratic)});
  const auto columns = standardised(data);
  CHECK(std::abs(mean_product(data, columns[0], columns[1])) < 1e-9);
  CHECK(mean_product(data, columns[1], columns[1]) == Approx(1.0).epsilon(1e-9));
}

TEST_CASE("design: columns without spread of their own become zero", "[design][unit]") {
  const auto is_zero = [](const std::vector<double>& column) {
    return std::all_of(column.begin(), column.end(), [](double v) { return v == 0.0; });
  };
  SECTION("a constant") {
    const auto columns =
        standardised(one_predictor(std::vector<double>(3000, 0.1), {form(Kind::identity), form(Kind::ln)}));
    CHECK(is_zero(columns[0]));
    CHECK(is_zero(columns[1]));
  }
  SECTION("a quadratic of two values") {
    std::vector<double> raw;
    for (int i = 0; i < 101; ++i) raw.push_back(i % 3 == 0 ? 0.3 : 7.7);
    const auto columns = standardised(one_predictor(raw, {form(Kind::quadratic)}));
    CHECK_FALSE(is_zero(columns[0]));
    CHECK(is_zero(columns[1]));
  }
  SECTION("a level that no row has") {
    std::vector<double> raw;
    for (int i = 0; i < 50; ++i) raw.push_back(i % 2 == 0 ? 0.0 : 2.0);
    const auto columns = standardised(one_predictor(raw, {test::levels({"a", "b", "c"})}));
    CHECK(is_zero(columns[0]));
    CHECK_FALSE(is_zero(columns[1]));
  }
}

TEST_CASE("design: columns of extreme size are standardised without overflow", "[design][unit]") {
  std::mt19937_64 random(24);
  for (const double scale : {1e-200, 1e-160, 1e160, 1e200, 1e300}) {
    std::vector<double> raw;
    for (int i = 0; i < 200; ++i) raw.push_back(scale * (2.0 + test::uniform(random)));
    const Data data = one_predictor(raw, {form(Kind::identity)});
    const auto columns = standardised(data);
    CHECK(mean_product(data, columns[0], columns[0]) == Approx(1.0).epsilon(1e-12));
  }
}

TEST_CASE("design: response scale is the weighted standard deviation", "[design][unit]") {
  const Data data = test::example_data(25, 1500, true);
  const auto columns = StandardColumns::fit(data, 1);
  REQUIRE(columns.ok());
  for (std::size_t r = 0; r < 2; ++r) {
    const Eigen::VectorXd z = design::response_vector(data, r, test::all_rows(data.n_rows));
    std::vector<double> centred(z.data(), z.data() + z.size());
    const double mean = base::weighted_mean(centred, data.weights);
    for (double& value : centred) value -= mean;
    CHECK(columns->response_scale()[r] == Approx(std::sqrt(mean_product(data, centred, centred))).epsilon(1e-13));
  }
}

TEST_CASE("design: an undefined form is reported with its label and row", "[design][unit]") {
  Data data = test::example_data(26, 1200, false);
  data.table_row[1100] = 4321;
  data.predictors[0].raw[1100] = -1.0;
  const auto columns = StandardColumns::fit(data, 2);
  REQUIRE_FALSE(columns.ok());
  CHECK(columns.error().kind == ErrorKind::data);
  CHECK(columns.error().message ==
        forms::term_name(data.predictors[0].menu[1], "area") + " is not a finite number on a row in use");
  CHECK(columns.error().where == "table row 4322, column 'area'");
  CHECK_FALSE(columns.error().hint.empty());
}

TEST_CASE("design: a response without spread or a weight that is not positive is refused", "[design][unit]") {
  Data data = test::example_data(27, 100, true);
  for (const double weight :
       {0.0, -1.0, std::numeric_limits<double>::quiet_NaN(), std::numeric_limits<double>::infinity()}) {
    Data wrong = data;
    wrong.weights[17] = weight;
    const auto columns = StandardColumns::fit(wrong, 1);
    REQUIRE_FALSE(columns.ok());
    CHECK(columns.error().where == "table row 18");
  }
  data.response.assign(100, 5.0);
  CHECK_FALSE(StandardColumns::fit(data, 1).ok());
}

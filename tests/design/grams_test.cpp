// build_grams against its definition by plain loops in long double.
#include "base/sums.hpp"
#include "design/standardise.hpp"
#include "example.hpp"
#include "instruction_sets.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <numeric>

using namespace formsieve;
using design::Data;
using design::Folds;
using forms::Kind;
using test::form;

namespace {

using Real = long double;

/// Columns and responses of all rows as build_grams standardises them, by the rows' own values: forms of one column
/// from their definition, the columns of wider forms as the standardiser gives them.
std::vector<std::vector<Real>> columns_of(const Data& data) {
  const auto standard = design::StandardColumns::fit(data, 1);
  std::vector<std::vector<Real>> columns(standard->order());
  std::vector<double> block(standard->order() * base::kRowChunk);
  for (std::size_t first = 0; first < data.n_rows; first += base::kRowChunk) {
    std::vector<std::uint32_t> rows(std::min(base::kRowChunk, data.n_rows - first));
    std::iota(rows.begin(), rows.end(), static_cast<std::uint32_t>(first));
    standard->evaluate(data, rows, block);
    for (std::size_t c = 0; c < columns.size(); ++c)
      for (std::size_t i = 0; i < rows.size(); ++i) columns[c].push_back(block[c * base::kRowChunk + i]);
  }
  const auto standardise = [&](const forms::Form& form, const std::vector<double>& raw, std::vector<Real>& column) {
    Real mean = 0.0L;
    Real variance = 0.0L;
    Real total = 0.0L;
    const auto weight = [&](std::size_t i) {
      return data.weights.empty() ? Real{1} : static_cast<Real>(data.weights[i]);
    };
    for (std::size_t i = 0; i < raw.size(); ++i) total += weight(i);
    for (std::size_t i = 0; i < raw.size(); ++i) mean += weight(i) * forms::evaluate(form, raw[i]) / total;
    for (std::size_t i = 0; i < raw.size(); ++i) {
      column[i] = forms::evaluate(form, raw[i]) - mean;
      variance += weight(i) * column[i] * column[i] / total;
    }
    for (Real& value : column) value /= std::sqrt(variance);
  };
  std::size_t c = 0;
  for (const auto& predictor : data.predictors)
    for (const auto& form : predictor.menu) {
      if (forms::n_columns(form) == 1) standardise(form, predictor.raw, columns[c]);
      c += forms::n_columns(form);
    }
  for (const auto& form : data.response_forms) standardise(form, data.response, columns[c++]);
  return columns;
}

/// Largest difference of a Gram from Σ w (a − mean_a)(b − mean_b) over rows with in[i], means by `mean_weight`,
/// relative to the columns' own entries.
double worst_difference(const std::vector<double>& gram, const std::vector<std::vector<Real>>& columns,
                        const std::vector<Real>& weight, const std::vector<Real>& mean_weight) {
  const std::size_t order = columns.size();
  const Real total = std::accumulate(mean_weight.begin(), mean_weight.end(), Real{0});
  std::vector<Real> mean(order, 0.0L);
  for (std::size_t c = 0; c < order; ++c)
    for (std::size_t i = 0; i < weight.size(); ++i) mean[c] += mean_weight[i] * columns[c][i] / total;
  double worst = 0.0;
  for (std::size_t a = 0; a < order; ++a) {
    for (std::size_t b = 0; b < order; ++b) {
      Real cross = 0.0L;
      for (std::size_t i = 0; i < weight.size(); ++i)
        cross += weight[i] * (columns[a][i] - mean[a]) * (columns[b][i] - mean[b]);
      const double own = std::sqrt(gram[a * (order + 1)] * gram[b * (order + 1)]);
      worst = std::max(worst, std::abs(gram[a + b * order] - static_cast<double>(cross)) / own);
    }
  }
  return worst;
}

void check_definition(const Data& data, const Folds& folds) {
  const auto set = design::build_grams(data, folds, 1);
  REQUIRE(set.ok());
  const auto columns = columns_of(data);
  REQUIRE(set->order() == columns.size());
  REQUIRE(set->n_folds == folds.count * folds.repeats);
  constexpr double kTolerance = 1e-12;
  const std::vector<Real> ones(data.n_rows, 1.0L);
  const std::vector<Real> weights =
      data.weights.empty() ? ones : std::vector<Real>(data.weights.begin(), data.weights.end());
  CHECK(worst_difference(set->all, columns, weights, weights) < kTolerance);
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    for (std::size_t fold = 0; fold < folds.count; ++fold) {
      std::vector<Real> training(data.n_rows);
      std::vector<Real> held_out(data.n_rows);
      for (std::size_t i = 0; i < data.n_rows; ++i) {
        const bool out = folds.fold_of[repeat][i] == fold;
        held_out[i] = out ? 1.0L : 0.0L;
        training[i] = out ? 0.0L : weights[i];
      }
      const std::size_t f = repeat * folds.count + fold;
      CHECK(worst_difference(set->training[f], columns, training, training) < kTolerance);
      CHECK(worst_difference(set->validation[f], columns, held_out, training) < kTolerance);
    }
  }
}

}  // namespace

TEST_CASE("design: Gram matrices equal their definition", "[design][property]") {
  const Data data = test::example_data(31, 1300, false);
  check_definition(data, test::folds_of(data, 5));
}

TEST_CASE("design: Gram matrices equal their definition with weights and repeats", "[design][property]") {
  const Data data = test::example_data(32, 700, true);
  check_definition(data, test::folds_of(data, 4, 2));
}

TEST_CASE("design: Gram matrices equal their definition when one fold holds most rows", "[design][property]") {
  const Data data = test::example_data(33, 2600, true);
  Folds folds = test::folds_of(data, 3);
  for (std::size_t i = 40; i < data.n_rows; ++i) folds.fold_of[0][i] = 1;
  check_definition(data, folds);
}

TEST_CASE("design: Gram matrices equal their definition with every instruction set", "[design][property]") {
  test::for_each_instruction_set([] {
    const Data data = test::example_data(39, 800, true);
    check_definition(data, test::folds_of(data, 3));
  });
}

TEST_CASE("design: Gram matrices equal their definition when the first rows are unlike the rest",
          "[design][property]") {
  Data constant = test::example_data(40, 3000, true);
  Data rising = constant;
  Data far = constant;
  for (std::size_t i = 0; i < 3000; ++i) {
    auto& raw = constant.predictors[0].raw;
    if (i < 1100) raw[i] = 2.5;
    rising.predictors[0].raw[i] *= std::exp(0.01 * static_cast<double>(i));
    if (i >= 1100) far.predictors[0].raw[i] += 5e4;
  }
  for (const Data* data : {&constant, &rising, &far}) check_definition(*data, test::folds_of(*data, 3, 2));
}

TEST_CASE("design: Gram matrices of columns of extreme size are those of the columns", "[design][property]") {
  Data data = test::example_data(41, 2500, false);
  data.predictors[0].menu = {form(Kind::identity)};
  for (const std::size_t n_zero : {0u, 1100u}) {
    std::fill_n(data.predictors[0].raw.begin(), n_zero, 0.0);
    const Folds folds = test::folds_of(data, 3);
    const auto plain = design::build_grams(data, folds, 1);
    for (const double scale : {0x1p-700, 0x1p-530, 0x1p-500, 0x1p500, 0x1p700}) {
      Data scaled = data;
      for (double& value : scaled.predictors[0].raw) value *= scale;
      const auto set = design::build_grams(scaled, folds, 1);
      REQUIRE(set.ok());
      for (std::size_t i = 0; i < set->all.size(); ++i) CHECK(set->all[i] == Approx(plain->all[i]).margin(1e-9));
    }
  }
}

TEST_CASE("design: a column that differs from a constant by roundings alone has zeros", "[design][unit]") {
  Data data = test::example_data(43, 2500, false);
  data.predictors[0].menu = {form(Kind::identity)};
  for (std::size_t i = 0; i < 2500; ++i) data.predictors[0].raw[i] = 1.0 + static_cast<double>(i % 3) * 0x1p-52;
  const auto set = design::build_grams(data, test::folds_of(data, 3), 1);
  REQUIRE(set.ok());
  CHECK(set->all[0] == 0.0);
}

TEST_CASE("design: a form undefined beyond the first rows is reported by row", "[design][unit]") {
  Data data = test::example_data(42, 2500, false);
  data.predictors[0].raw[2100] = -1.0;
  const auto set = design::build_grams(data, test::folds_of(data, 3), 2);
  REQUIRE_FALSE(set.ok());
  CHECK(set.error().where == "table row 2101, column 'area'");
}

TEST_CASE("design: Gram matrices keep their digits when one row holds nearly all the spread", "[design][property]") {
  // In the fold without the row the column's sum of squares is 1e-9 of the whole: subtracting the fold from the total
  // would leave seven digits.
  Data data = test::example_data(34, 400, false);
  data.predictors.resize(1);
  data.predictors[0].menu = {form(Kind::identity)};
  for (double& value : data.predictors[0].raw) value = 1.0 + 0.001 * value / 400.0;
  data.predictors[0].raw[7] = 1500.0;
  const Folds folds = test::folds_of(data, 5);
  const auto set = design::build_grams(data, folds, 1);
  REQUIRE(set.ok());
  const std::size_t fold = folds.fold_of[0][7];
  CHECK(set->training[fold][0] < 1e-8 * set->all[0]);
  CHECK(set->training[fold][0] > 0.0);
  std::vector<Real> training;
  for (const auto of : folds.fold_of[0]) training.push_back(of == fold ? 0.0L : 1.0L);
  CHECK(worst_difference(set->training[fold], columns_of(data), training, training) < 1e-10);
}

TEST_CASE("design: Gram matrices are the same bits for any number of threads", "[design][property][parallel]") {
  for (const bool weighted : {false, true}) {
    const Data data = test::example_data(35, 20000, weighted);
    const Folds folds = test::folds_of(data, 3, 2);
    const auto one = design::build_grams(data, folds, 1);
    REQUIRE(one.ok());
    for (const unsigned threads : {2u, 4u, 0u}) {
      const auto many = design::build_grams(data, folds, threads);
      REQUIRE(many.ok());
      CHECK(many->all == one->all);
      CHECK(many->training == one->training);
      CHECK(many->validation == one->validation);
      CHECK(many->response_scale == one->response_scale);
    }
  }
}

TEST_CASE("design: equal columns have equal entries to the bit", "[design][property]") {
  Data data = test::example_data(36, 3000, true);
  data.predictors[2] = data.predictors[0];
  data.predictors[2].column = "copy";
  const auto set = design::build_grams(data, test::folds_of(data, 4), 1);
  REQUIRE(set.ok());
  const std::size_t order = set->order();  // area's forms are columns 0 … 3, the copies' 7 … 10
  for (const auto& gram : set->training)
    for (std::size_t c = 0; c < 4; ++c)
      for (std::size_t i = 0; i < order; ++i) CHECK(gram[c * order + i] == gram[(7 + c) * order + i]);
}

TEST_CASE("design: a column that is constant where a fold trains has zeros there", "[design][unit]") {
  Data data = test::example_data(37, 300, false);
  const Folds folds = test::folds_of(data, 3);
  for (std::size_t i = 0; i < 300; ++i)
    if (folds.fold_of[0][i] != 1) data.predictors[0].raw[i] = 0.7;
  const auto set = design::build_grams(data, folds, 1);
  REQUIRE(set.ok());
  const std::size_t order = set->order();
  for (std::size_t c = 0; c < 4; ++c) {
    for (std::size_t i = 0; i < order; ++i) {
      CHECK(set->training[1][c * order + i] == 0.0);
      CHECK(set->training[1][i * order + c] == 0.0);
    }
    CHECK(set->training[0][c * (order + 1)] > 0.0);
    CHECK(set->validation[1][c * (order + 1)] > 0.0);
  }
}

TEST_CASE("design: a constant column has zeros everywhere and no NaN appears", "[design][unit]") {
  Data data = test::example_data(38, 200, true);
  std::fill(data.predictors[0].raw.begin(), data.predictors[0].raw.end(), 3.3);
  const auto set = design::build_grams(data, test::folds_of(data, 4), 1);
  REQUIRE(set.ok());
  for (const auto* matrices : {&set->training, &set->validation})
    for (const auto& gram : *matrices)
      for (const double value : gram) CHECK(std::isfinite(value));
  CHECK(set->all[0] == 0.0);
}

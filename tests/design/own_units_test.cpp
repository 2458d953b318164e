// build_own_units_grams against its definition by plain loops in long double.
#include "base/sums.hpp"
#include "design/own_units.hpp"
#include "design/standardise.hpp"
#include "example.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <numeric>

using namespace formsieve;
using design::Data;
using design::Folds;
using design::Pilot;

namespace {

using Real = long double;

/// Slopes of either sign over five powers of ten, and working responses about the response.
Pilot made_pilot(const Data& data, const Folds& folds, std::size_t response, std::uint64_t seed) {
  std::mt19937_64 random(seed);
  Pilot pilot;
  pilot.response = response;
  const auto z = design::response_vector(data, response, test::all_rows(data.n_rows));
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    pilot.slope.emplace_back();
    pilot.working.emplace_back();
    for (std::size_t i = 0; i < data.n_rows; ++i) {
      pilot.slope.back().push_back((i % 3 == 0 ? -1.0 : 1.0) * std::exp(2.0 * test::normal(random)));
      pilot.working.back().push_back(z[static_cast<Eigen::Index>(i)] + test::normal(random));
    }
  }
  return pilot;
}

/// Standardised columns and responses of all rows, [order][n_rows].
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
  return columns;
}

/// Largest difference of one fold's matrix from the definition, relative to the entries' own.
double worst_difference(const Data& data, const Folds& folds, const Pilot& pilot, const base::GramSet::OwnUnits& own,
                        double response_scale, std::size_t repeat, std::size_t fold) {
  const auto all = columns_of(data);
  const std::size_t n_columns = all.size() - data.response_forms.size();
  const auto z = design::response_vector(data, pilot.response, test::all_rows(data.n_rows));
  std::vector<std::vector<Real>> columns(all.begin(), all.begin() + static_cast<std::ptrdiff_t>(n_columns));
  columns.push_back(all[n_columns + pilot.response]);
  for (auto& column : columns) {
    Real mean = 0.0L;
    Real total = 0.0L;
    for (std::size_t i = 0; i < data.n_rows; ++i) {
      if (folds.fold_of[repeat][i] == fold) continue;
      const Real weight = data.weights.empty() ? 1.0L : static_cast<Real>(data.weights[i]);
      mean += weight * column[i];
      total += weight;
    }
    for (Real& value : column) value -= mean / total;
  }
  auto& shift = columns.emplace_back();
  for (std::size_t i = 0; i < data.n_rows; ++i)
    shift.push_back((pilot.working[repeat][i] - z[static_cast<Eigen::Index>(i)]) / static_cast<Real>(response_scale));
  const std::size_t order = n_columns + 2;
  const std::vector<double>& gram = own.validation[repeat * folds.count + fold];
  REQUIRE(gram.size() == order * order);
  const Real factor = static_cast<Real>(own.sse_factor) / (static_cast<Real>(response_scale) * response_scale);
  double worst = 0.0;
  for (std::size_t a = 0; a < order; ++a) {
    for (std::size_t b = 0; b < order; ++b) {
      Real sum = 0.0L;
      for (std::size_t i = 0; i < data.n_rows; ++i)
        if (folds.fold_of[repeat][i] == fold)
          sum += pilot.slope[repeat][i] * pilot.slope[repeat][i] / factor * columns[a][i] * columns[b][i];
      const double size = std::sqrt(gram[a * (order + 1)] * gram[b * (order + 1)]);
      worst = std::max(worst, std::abs(gram[a + b * order] - static_cast<double>(sum)) / size);
    }
  }
  return worst;
}

void check_definition(const Data& data, const Folds& folds) {
  const auto grams = design::build_grams(data, folds, 1);
  REQUIRE(grams.ok());
  const std::vector<Pilot> pilots = {made_pilot(data, folds, 1, 5), made_pilot(data, folds, 0, 6)};
  const auto own = design::build_own_units_grams(data, folds, pilots, 1);
  REQUIRE(own.ok());
  REQUIRE(own->size() == 2);
  for (std::size_t p = 0; p < 2; ++p) {
    REQUIRE((*own)[p].response == pilots[p].response);
    REQUIRE((*own)[p].validation.size() == folds.count * folds.repeats);
    for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat)
      for (std::size_t fold = 0; fold < folds.count; ++fold)
        CHECK(worst_difference(data, folds, pilots[p], (*own)[p], grams->response_scale[pilots[p].response], repeat,
                               fold) < 1e-12);
  }
}

}  // namespace

TEST_CASE("design: own-units matrices equal their definition", "[design][property]") {
  const Data data = test::example_data(41, 1300, false);
  check_definition(data, test::folds_of(data, 3));
}

TEST_CASE("design: own-units matrices equal their definition with weights and repeats", "[design][property]") {
  const Data data = test::example_data(42, 500, true);
  check_definition(data, test::folds_of(data, 4, 2));
}

TEST_CASE("design: own-units matrices are the same bits for any number of threads", "[design][property][parallel]") {
  const Data data = test::example_data(43, 20000, true);
  const Folds folds = test::folds_of(data, 3);
  const std::vector<Pilot> pilots = {made_pilot(data, folds, 1, 7)};
  const auto one = design::build_own_units_grams(data, folds, pilots, 1);
  REQUIRE(one.ok());
  for (const unsigned threads : {2u, 4u}) {
    const auto many = design::build_own_units_grams(data, folds, pilots, threads);
    REQUIRE(many.ok());
    CHECK(many->front().validation == one->front().validation);
    CHECK(many->front().sse_factor == one->front().sse_factor);
  }
}

TEST_CASE("design: no pilot, no own-units matrices", "[design][unit]") {
  const Data data = test::example_data(44, 100, false);
  const auto own = design::build_own_units_grams(data, test::folds_of(data, 3), {}, 1);
  REQUIRE(own.ok());
  CHECK(own->empty());
}

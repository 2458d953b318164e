// From rows to scores: the walk over the Gram matrices that room design builds, against refits of the design matrices.
//
// Tables: tests/reference/open. trees: Ryan, Joiner & Ryan 1976; rock: 12 cores of 4 sections each, so rows are
// grouped; both carried by Debian's r-base-core.
#include "design/design.hpp"
#include "problem.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <map>
#include <numeric>
#include <sstream>
#include <string>

using namespace formsieve;
using design::Data;
using forms::Kind;

namespace {

using NumberTable = std::map<std::string, std::vector<double>>;

/// A table of numbers separated by commas.
NumberTable read_numbers(const std::string& name) {
  std::ifstream file(std::filesystem::path(FORMSIEVE_SOURCE_DIR) / "tests/reference/open" / name);
  std::string line;
  std::getline(file, line);
  std::vector<std::string> header;
  std::istringstream names(line);
  for (std::string cell; std::getline(names, cell, ',');) header.push_back(cell);
  NumberTable table;
  while (std::getline(file, line)) {
    std::istringstream cells(line);
    std::string cell;
    for (std::size_t c = 0; std::getline(cells, cell, ','); ++c) table[header[c]].push_back(std::stod(cell));
  }
  return table;
}

std::vector<forms::Form> menu(const std::vector<Kind>& kinds) {
  std::vector<forms::Form> result;
  for (const Kind kind : kinds) {
    forms::Form form;
    form.kind = kind;
    result.push_back(form);
  }
  return result;
}

std::vector<std::size_t> all_rows(std::size_t n) {
  std::vector<std::size_t> rows(n);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  return rows;
}

Data data_of(const NumberTable& table, const std::string& response, const std::vector<Kind>& response_forms,
             const std::vector<std::string>& predictors, const std::vector<Kind>& kinds) {
  Data data;
  data.response = table.at(response);
  data.n_rows = data.response.size();
  data.table_row = all_rows(data.n_rows);
  data.response_forms = menu(response_forms);
  for (const std::string& name : predictors)
    data.predictors.push_back({name, false, false, table.at(name), menu(kinds)});
  return data;
}

/// The same search as columns and folds, for explicit refits.
test::Problem problem_of(const Data& data, const design::Folds& folds, std::optional<std::size_t> max_terms) {
  test::Problem problem;
  const auto layout = design::layout(data);
  const auto rows = all_rows(data.n_rows);
  problem.columns.resize(static_cast<Eigen::Index>(data.n_rows), static_cast<Eigen::Index>(layout.n_columns));
  for (std::size_t j = 0; j < layout.block.size(); ++j) {
    search::PredictorChoices choices;
    choices.always = data.predictors[j].always;
    for (std::size_t f = 0; f < layout.block[j].size(); ++f) {
      const auto [first, n_columns] = layout.block[j][f];
      choices.forms.push_back({first, n_columns});
      std::vector<std::uint16_t> choice(layout.block.size(), 0);
      choice[j] = static_cast<std::uint16_t>(f + 1);
      problem.columns.middleCols(static_cast<Eigen::Index>(first), static_cast<Eigen::Index>(n_columns)) =
          design::design_matrix(data, choice, rows).rightCols(static_cast<Eigen::Index>(n_columns));
    }
    problem.space.predictors.push_back(choices);
  }
  problem.space.n_responses = data.response_forms.size();
  problem.space.max_terms = max_terms;
  problem.responses.resize(static_cast<Eigen::Index>(data.n_rows),
                           static_cast<Eigen::Index>(data.response_forms.size()));
  for (std::size_t r = 0; r < data.response_forms.size(); ++r)
    problem.responses.col(static_cast<Eigen::Index>(r)) = design::response_vector(data, r, rows);
  problem.weights = data.weights;
  problem.fold_of = folds.fold_of;
  return problem;
}

void check_against_refits(const Data& data, const design::Folds& folds, std::optional<std::size_t> max_terms = {}) {
  const auto grams = design::build_grams(data, folds, 1);
  REQUIRE(grams.ok());
  const test::Problem problem = problem_of(data, folds, max_terms);
  const auto result = search::walk(problem.space, *grams, test::keep_all(problem.space, 2.0));
  CHECK(result.n_inseparable == 0);
  CHECK(result.n_scored == search::count(problem.space));
  double worst_cv = 0.0;
  double worst_rss = 0.0;
  for (const auto& list : result.lists[0]) {
    for (const auto& scored : list) {
      const test::Refit refit = test::refit(problem, scored.choice);
      worst_cv = std::max(worst_cv, std::abs(scored.cv_sse - refit.cv_sse) / refit.cv_sse);
      worst_rss = std::max(worst_rss, std::abs(scored.rss - refit.rss) / refit.rss);
    }
  }
  CHECK(worst_cv < 1e-9);
  CHECK(worst_rss < 1e-9);
}

}  // namespace

TEST_CASE("search: built Gram matrices give the refits' scores for the cherry trees", "[search][property]") {
  const Data data =
      data_of(read_numbers("trees.csv"), "volume", {Kind::identity, Kind::sqrt, Kind::ln}, {"girth", "height"},
              {Kind::identity, Kind::sqrt, Kind::ln, Kind::reciprocal, Kind::square, Kind::quadratic});
  check_against_refits(data, *design::make_folds(data.table_row, {}));
}

TEST_CASE("search: ln volume on ln girth and ln height leads the cherry trees' ln candidates of two terms",
          "[search][reference]") {
  const Data data = data_of(read_numbers("trees.csv"), "volume", {Kind::ln}, {"girth", "height"},
                            {Kind::identity, Kind::sqrt, Kind::ln});
  const auto folds = *design::make_folds(data.table_row, {});
  const auto grams = design::build_grams(data, folds, 1);
  const test::Problem problem = problem_of(data, folds, std::nullopt);
  const auto best = search::walk(problem.space, *grams, test::keep_all(problem.space, 2.0)).lists[1][0].front();
  CHECK(best.choice.choice == std::vector<std::uint16_t>{3, 3});
  // R² 0.97768 of ln volume on ln girth and ln height: published with the data (reference folder), r-base-core
  const double total = grams->response_scale[0] * grams->response_scale[0] * 31.0;
  CHECK(1.0 - best.rss / total == Approx(0.97768).margin(5e-6));
}

TEST_CASE("search: built Gram matrices give the refits' scores for grouped rocks", "[search][property]") {
  const NumberTable table = read_numbers("rock.csv");
  const Data data = data_of(table, "perm", {Kind::identity, Kind::ln}, {"area", "peri", "shape"},
                            {Kind::identity, Kind::sqrt, Kind::ln, Kind::reciprocal});
  table::Column core;
  core.name = "core";
  for (std::size_t i = 0; i < data.n_rows; ++i) core.numbers.push_back(static_cast<double>(i / 4));
  design::FoldRequest request;
  request.count = 6;
  request.group = &core;
  request.repeats = 2;
  check_against_refits(data, *design::make_folds(data.table_row, request));
}

TEST_CASE("search: built Gram matrices give the refits' scores with weights, levels and always", "[search][property]") {
  std::mt19937_64 random(51);
  NumberTable table;
  for (int i = 0; i < 90; ++i) {
    const double area = std::exp(3.0 + test::normal(random));
    const double load = 30.0 + 6.0 * test::normal(random);
    table["area"].push_back(area);
    table["load"].push_back(load);
    table["rain"].push_back(std::exp(test::normal(random)));
    table["site"].push_back(static_cast<double>(i % 4));
    table["energy"].push_back(
        std::exp(0.5 * std::log(area) + 0.001 * load * load + 0.3 * (i % 4) + 0.3 * test::normal(random)));
    table["weight"].push_back(0.2 + 3.0 * test::uniform(random));
  }
  Data data = data_of(table, "energy", {Kind::identity, Kind::sqrt, Kind::ln}, {"area", "load", "rain", "site"},
                      {Kind::identity, Kind::ln, Kind::quadratic});
  forms::Form levels;
  levels.kind = Kind::levels;
  levels.levels = {"a", "b", "c", "d"};
  data.predictors[3].text = true;
  data.predictors[3].menu = {levels};
  data.predictors[0].always = true;
  data.weights = table["weight"];
  design::FoldRequest request;
  request.count = 5;
  request.repeats = 2;
  check_against_refits(data, *design::make_folds(data.table_row, request));
  check_against_refits(data, *design::make_folds(data.table_row, request), 3);
}

TEST_CASE("search: a level that a training fold lacks is inseparable there", "[search][unit]") {
  NumberTable table;
  std::mt19937_64 random(52);
  for (int i = 0; i < 40; ++i) {
    table["x"].push_back(test::normal(random));
    table["site"].push_back(i < 38 ? static_cast<double>(i % 2) : 2.0);
    table["y"].push_back(test::normal(random));
    table["fold"].push_back(i < 20 ? 1.0 : 2.0);  // both rows of the third level are held out together
  }
  Data data = data_of(table, "y", {Kind::identity}, {"x", "site"}, {Kind::identity});
  forms::Form levels;
  levels.kind = Kind::levels;
  levels.levels = {"a", "b", "c"};
  data.predictors[1].menu = {levels};
  table::Column fold;
  fold.name = "fold";
  fold.numbers = table["fold"];
  design::FoldRequest request;
  request.given = &fold;
  const auto folds = *design::make_folds(data.table_row, request);
  const auto grams = design::build_grams(data, folds, 1);
  REQUIRE(grams.ok());
  const test::Problem problem = problem_of(data, folds, std::nullopt);
  const auto result = search::walk(problem.space, *grams, test::keep_all(problem.space, 2.0));
  CHECK(result.n_scored == 2);
  CHECK(result.n_inseparable == 2);
}

// The two scores in own units against explicit refits by rows, and against the congruence that GramSet::OwnUnits names.
#include "design/own_units.hpp"
#include "problem.hpp"
#include "search/descend.hpp"
#include "search/own_score.hpp"

#include <catch2/catch.hpp>

#include <Eigen/QR>

#include <cmath>
#include <limits>
#include <numeric>
#include <set>

using namespace formsieve;
using design::Data;
using forms::Kind;

namespace {

using Eigen::Index;

forms::Form form(Kind kind) {
  forms::Form result;
  result.kind = kind;
  return result;
}

std::vector<std::size_t> all_rows(std::size_t n) {
  std::vector<std::size_t> rows(n);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  return rows;
}

/// Two skewed predictors, a text column and a positive response under three forms.
Data made_data(std::uint64_t seed, std::size_t n, bool weighted) {
  std::mt19937_64 random(seed);
  Data data;
  data.n_rows = n;
  data.table_row = all_rows(n);
  data.response_forms = {form(Kind::identity), form(Kind::ln), form(Kind::reciprocal)};
  data.predictors.resize(3);
  data.predictors[0].column = "area";
  data.predictors[0].menu = {form(Kind::identity), form(Kind::ln), form(Kind::reciprocal)};
  data.predictors[1].column = "load";
  data.predictors[1].menu = {form(Kind::identity), form(Kind::quadratic)};
  data.predictors[2].column = "site";
  data.predictors[2].text = true;
  data.predictors[2].menu = {form(Kind::levels)};
  data.predictors[2].menu[0].levels = {"north", "south", "west"};
  for (std::size_t i = 0; i < n; ++i) {
    const double area = std::exp(2.0 + test::normal(random));
    const double load = 3.0 + test::normal(random);
    const auto site = static_cast<double>(random() % 3);
    data.predictors[0].raw.push_back(area);
    data.predictors[1].raw.push_back(load);
    data.predictors[2].raw.push_back(site);
    data.response.push_back(std::exp(0.5 * std::log(area) + 0.1 * load + 0.2 * site + 0.4 * test::normal(random)));
    if (weighted) data.weights.push_back(0.2 + 3.0 * test::uniform(random));
  }
  return data;
}

search::Space space_of(const Data& data) {
  search::Space space;
  space.n_responses = data.response_forms.size();
  for (const auto& blocks : design::layout(data).block) {
    space.predictors.emplace_back();
    for (const auto& [first, n_columns] : blocks) space.predictors.back().forms.push_back({first, n_columns});
  }
  return space;
}

design::Pilot made_pilot(const Data& data, const design::Folds& folds, std::size_t response) {
  std::mt19937_64 random(response + 90);
  design::Pilot pilot;
  pilot.response = response;
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    pilot.slope.emplace_back();
    pilot.working.emplace_back();
    const auto z = design::response_vector(data, response, all_rows(data.n_rows));
    for (std::size_t i = 0; i < data.n_rows; ++i) {
      pilot.slope.back().push_back((response == 2 ? -30.0 : 20.0) * std::exp(test::normal(random)));
      pilot.working.back().push_back(z[static_cast<Index>(i)] + 0.5 * test::normal(random));
    }
  }
  return pilot;
}

/// Both scores by refits of the rows: Σ H′² (z − ẑ)² and Σ H′² (z* − ẑ)².
search::OwnScores by_rows(const Data& data, const design::Folds& folds, const design::Pilot& pilot,
                          const search::Choice& choice) {
  const Eigen::MatrixXd x = design::design_matrix(data, choice.choice, all_rows(data.n_rows));
  const Eigen::VectorXd z = design::response_vector(data, choice.response, all_rows(data.n_rows));
  search::OwnScores sums;
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    for (std::size_t fold = 0; fold < folds.count; ++fold) {
      Eigen::VectorXd root(z.size());
      for (Index i = 0; i < z.size(); ++i) {
        const auto row = static_cast<std::size_t>(i);
        const double weight = data.weights.empty() ? 1.0 : data.weights[row];
        root[i] = folds.fold_of[repeat][row] == fold ? 0.0 : std::sqrt(weight);
      }
      const Eigen::VectorXd beta =
          (root.asDiagonal() * x).colPivHouseholderQr().solve(Eigen::VectorXd(root.cwiseProduct(z)));
      for (Index i = 0; i < z.size(); ++i) {
        const auto row = static_cast<std::size_t>(i);
        if (folds.fold_of[repeat][row] != fold) continue;
        const double slope = pilot.slope[repeat][row];
        const double fitted = x.row(i).dot(beta);
        sums.pilot_weight += std::pow(slope * (z[i] - fitted), 2);
        sums.working_response += std::pow(slope * (pilot.working[repeat][row] - fitted), 2);
      }
    }
  }
  return sums;
}

struct Made {
  Data data;
  design::Folds folds;
  std::vector<design::Pilot> pilots;
  base::GramSet grams;
  search::Space space;
  std::vector<search::Choice> choices;  ///< of the responses with pilots
};

Made make(Data data, const design::FoldRequest& request) {
  Made made{std::move(data), {}, {}, {}, {}, {}};
  made.folds = *design::make_folds(made.data.table_row, request);
  made.grams = *design::build_grams(made.data, made.folds, 1);
  made.pilots = {made_pilot(made.data, made.folds, 1), made_pilot(made.data, made.folds, 2)};
  made.grams.own_units = *design::build_own_units_grams(made.data, made.folds, made.pilots, 1);
  made.space = space_of(made.data);
  for (const auto& choice : test::all_choices(made.space))
    if (choice.response > 0) made.choices.push_back(choice);
  return made;
}

void check_against_rows(const Made& made) {
  const auto scores = search::own_scores(made.space, made.grams, made.choices, 1);
  REQUIRE(scores.size() == 2 * 4 * 3 * 2);
  for (std::size_t i = 0; i < scores.size(); ++i) {
    const auto rows = by_rows(made.data, made.folds, made.pilots[made.choices[i].response - 1], made.choices[i]);
    CHECK(scores[i].pilot_weight == Approx(rows.pilot_weight).epsilon(1e-9));
    CHECK(scores[i].working_response == Approx(rows.working_response).epsilon(1e-9));
  }
}

/// Both scores of one candidate by the eliminations that GramSet::OwnUnits describes.
search::OwnScores by_elimination(const Made& made, const search::Choice& choice) {
  const auto& own = *search::own_units_of(made.grams, choice.response);
  const std::size_t n = made.grams.n_columns;
  const std::size_t order = made.grams.order();
  std::vector<std::size_t> columns;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const auto& block = made.space.predictors[j].forms[choice.choice[j] - 1u];
    for (std::size_t c = 0; c < block.n_columns; ++c) columns.push_back(block.first_column + c);
  }
  search::OwnScores sums;
  for (std::size_t f = 0; f < made.grams.n_folds; ++f) {
    // columns, the response, and in V the shift
    Eigen::MatrixXd a(n + 1, n + 1);
    const auto index = [&](std::size_t i) { return i < n ? i : n + choice.response; };
    for (std::size_t i = 0; i <= n; ++i)
      for (std::size_t j = 0; j <= n; ++j)
        a(static_cast<Index>(i), static_cast<Index>(j)) = made.grams.training[f][index(i) + index(j) * order];
    Eigen::MatrixXd v = Eigen::Map<const Eigen::MatrixXd>(own.validation[f].data(), n + 2, n + 2);
    for (const std::size_t c : columns) {
      const auto at = static_cast<Index>(c);
      const Eigen::VectorXd row = a.col(at);
      const Eigen::VectorXd m = row / row[at];
      const Eigen::VectorXd v_row = v.col(at);
      const double v_cc = v_row[at];
      const auto kept = static_cast<Index>(n + 1);
      a -= m * row.transpose();
      v.topLeftCorner(kept, kept) +=
          -m * v_row.head(kept).transpose() - v_row.head(kept) * m.transpose() + v_cc * m * m.transpose();
      v.col(kept).head(kept) -= m * v_row[kept];
      v.row(kept).head(kept) = v.col(kept).head(kept).transpose();
      // the column itself is done with
      a.row(at).setZero();
      a.col(at).setZero();
      v.row(at).setZero();
      v.col(at).setZero();
    }
    const auto y = static_cast<Index>(n);
    sums.pilot_weight += own.sse_factor * v(y, y);
    sums.working_response += own.sse_factor * (v(y, y) + 2.0 * v(y, y + 1) + v(y + 1, y + 1));
  }
  return sums;
}

}  // namespace

TEST_CASE("search: own-units scores equal refits by rows", "[search][property]") {
  check_against_rows(make(made_data(61, 60, false), {5, 1, 3}));
}

TEST_CASE("search: own-units scores equal refits by rows with weights, groups and repeats", "[search][property]") {
  Data data = made_data(62, 72, true);
  table::Column group;
  group.name = "group";
  for (std::size_t i = 0; i < data.n_rows; ++i) group.numbers.push_back(static_cast<double>(i / 3));
  design::FoldRequest request{4, 2, 5};
  request.group = &group;
  check_against_rows(make(std::move(data), request));
}

TEST_CASE("search: own-units matrices give the scores by eliminations", "[search][property]") {
  const Made made = make(made_data(63, 60, true), {5, 1, 3});
  const auto scores = search::own_scores(made.space, made.grams, made.choices, 1);
  for (std::size_t i = 0; i < scores.size(); ++i) {
    const auto eliminated = by_elimination(made, made.choices[i]);
    CHECK(scores[i].pilot_weight == Approx(eliminated.pilot_weight).epsilon(1e-9));
    CHECK(scores[i].working_response == Approx(eliminated.working_response).epsilon(1e-9));
  }
}

TEST_CASE("search: own-units scores are the same bits for any number of threads", "[search][property][parallel]") {
  const Made made = make(made_data(64, 60, false), {5, 1, 3});
  std::vector<search::Choice> many;
  for (int i = 0; i < 40; ++i) many.insert(many.end(), made.choices.begin(), made.choices.end());
  const auto one = search::own_scores(made.space, made.grams, many, 1);
  for (const unsigned threads : {2u, 4u}) {
    const auto others = search::own_scores(made.space, made.grams, many, threads);
    REQUIRE(others.size() == one.size());
    for (std::size_t i = 0; i < one.size(); ++i) {
      CHECK(others[i].pilot_weight == one[i].pilot_weight);
      CHECK(others[i].working_response == one[i].working_response);
    }
  }
}

TEST_CASE("search: an inseparable candidate has infinite own-units scores", "[search][unit]") {
  Data data = made_data(65, 40, false);
  data.predictors[1] = data.predictors[0];
  data.predictors[1].column = "copy";
  const Made made = make(std::move(data), {4, 1, 3});
  const search::Choice twice{1, {1, 1, 0}};
  const auto scores = search::own_scores(made.space, made.grams, std::vector{twice}, 1);
  CHECK(std::isinf(scores[0].pilot_weight));
  CHECK(std::isinf(scores[0].working_response));
}

namespace {

/// Held-out error of every candidate of one response that the walk can separate.
std::map<std::vector<std::uint16_t>, double> walked(const search::Space& space, const base::GramSet& grams,
                                                    std::size_t response) {
  std::map<std::vector<std::uint16_t>, double> sse;
  const auto result = search::walk(space, grams, test::keep_all(space, 2.0));
  for (const auto& scored : result.lists[0][response]) sse[scored.choice.choice] = scored.cv_sse;
  return sse;
}

void check_descent(const search::Space& space, const base::GramSet& grams, std::size_t response) {
  search::DescentOptions options;
  options.threads = 1;
  const auto found = search::descend(space, grams, response, options);
  const auto sse = walked(space, grams, response);
  REQUIRE(!found.empty());
  CHECK(found.size() <= options.keep);
  std::set<std::vector<std::uint16_t>> distinct;
  double last = 0.0;
  for (const auto& choice : found) {
    CHECK(choice.response == response);
    REQUIRE(sse.contains(choice.choice));  // a candidate of the space, separable
    CHECK(sse.at(choice.choice) >= last * (1.0 - 1e-9));
    last = sse.at(choice.choice);
    distinct.insert(choice.choice);
  }
  CHECK(distinct.size() == found.size());
  // no single change improves the best
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    for (std::size_t c = 0; c <= space.predictors[j].forms.size(); ++c) {
      auto changed = found.front().choice;
      changed[j] = static_cast<std::uint16_t>(c);
      if (const auto other = sse.find(changed); other != sse.end())
        CHECK(other->second >= sse.at(found.front().choice) * (1.0 - 1e-9));
    }
  }
  options.threads = 3;
  CHECK(search::descend(space, grams, response, options) == found);
}

}  // namespace

TEST_CASE("search: a descent ends where no single change lowers the held-out error", "[search][property]") {
  for (const std::uint64_t seed : {71u, 72u, 73u, 74u}) {
    test::Problem problem =
        test::make_problem(seed, 60, {{{1, 1, 1}}, {{1, 2}}, {{1, 1}, true}, {{1, 1, 1}}, {{1}}}, 2, 5);
    const auto grams = test::grams_of(problem);
    check_descent(problem.space, grams, 0);
    check_descent(problem.space, grams, 1);
    problem.space.max_terms = 2;
    check_descent(problem.space, grams, 1);
  }
}

TEST_CASE("search: a descent finds nothing where max_terms leaves no candidate", "[search][unit]") {
  test::Problem problem = test::make_problem(75, 40, {{{1, 1}, true}, {{1}, true}}, 1, 4);
  const auto grams = test::grams_of(problem);
  problem.space.max_terms = 1;
  CHECK(search::descend(problem.space, grams, 0, {}).empty());
}

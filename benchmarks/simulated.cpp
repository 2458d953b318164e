#include "simulated.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <random>
#include <string>

namespace formsieve::bench {

namespace {

using forms::Kind;

constexpr std::array kForms = {Kind::identity,          Kind::ln,     Kind::sqrt, Kind::reciprocal,
                               Kind::reciprocal_square, Kind::square, Kind::cube, Kind::reciprocal_sqrt};
constexpr std::array kResponses = {Kind::ln, Kind::identity, Kind::sqrt};

forms::Form form_of(Kind kind) {
  forms::Form form;
  form.kind = kind;
  return form;
}

design::Data simulate_rows(const Shape& shape) {
  std::mt19937_64 random(20261201);
  std::normal_distribution<double> normal;
  design::Data data;
  data.n_rows = shape.n_rows;
  data.predictors.resize(shape.n_predictors);
  for (std::size_t i = 0; i < shape.n_rows; ++i) {
    const double common = normal(random);
    double logarithm = 5.0 + 0.3 * normal(random);
    for (std::size_t j = 0; j < shape.n_predictors; ++j) {
      const double x = std::exp(0.5 * (std::sqrt(0.7) * normal(random) + std::sqrt(0.3) * common));
      data.predictors[j].raw.push_back(x);
      if (j % 3 == 0) logarithm += 0.2 * std::log(x) + 0.1 * std::sqrt(x);
    }
    data.response.push_back(std::exp(logarithm));
    data.table_row.push_back(i);
  }
  return data;
}

design::Folds deal(const Shape& shape) {
  design::Folds folds;
  folds.count = shape.n_folds;
  folds.fold_of.resize(1);
  for (std::size_t i = 0; i < shape.n_rows; ++i)
    folds.fold_of[0].push_back(static_cast<std::uint32_t>(i % shape.n_folds));
  std::shuffle(folds.fold_of[0].begin(), folds.fold_of[0].end(), std::mt19937_64(7));
  return folds;
}

}  // namespace

Problem simulate(const Shape& shape) {
  Problem problem{shape, simulate_rows(shape), deal(shape), {}};
  for (std::size_t j = 0; j < shape.n_predictors; ++j) {
    problem.data.predictors[j].column = "x" + std::to_string(j + 1);
    for (std::size_t f = 0; f < std::min(shape.n_forms, kForms.size()); ++f)
      problem.data.predictors[j].menu.push_back(form_of(kForms[f]));
  }
  for (std::size_t r = 0; r < std::min(shape.n_responses, kResponses.size()); ++r)
    problem.data.response_forms.push_back(form_of(kResponses[r]));
  problem.space.n_responses = problem.data.response_forms.size();
  problem.space.max_terms = shape.max_terms;
  for (const auto& blocks : design::layout(problem.data).block) {
    search::PredictorChoices choices;
    for (const auto& [first, count] : blocks) choices.forms.push_back({first, count});
    problem.space.predictors.push_back(std::move(choices));
  }
  return problem;
}

std::vector<double> aic_penalty(const Problem& problem) {
  std::vector<double> penalty;
  for (std::size_t k = 0; k <= problem.shape.n_predictors; ++k) penalty.push_back(2.0 * static_cast<double>(k + 2));
  return penalty;
}

search::WalkOptions walk_options(const Problem& problem) {
  search::WalkOptions options;
  options.rules = {{search::Score::cv_sse, 50, {}}, {search::Score::penalised_rss, 50, aic_penalty(problem)}};
  options.threads = 1;
  return options;
}

}  // namespace formsieve::bench

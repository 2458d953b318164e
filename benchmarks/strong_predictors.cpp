#include "strong_predictors.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <random>
#include <string>

namespace formsieve::bench {

namespace {

using forms::Kind;

constexpr std::array kForms = {Kind::identity,   Kind::ln,     Kind::sqrt,
                               Kind::reciprocal, Kind::square, Kind::reciprocal_sqrt};

double value_of(std::size_t form, double x) {
  const std::array values = {x, std::log(x), std::sqrt(x), 1.0 / x, x * x, 1.0 / std::sqrt(x)};
  return values.at(form);
}

void standardise(std::vector<double>& values) {
  double mean = 0.0;
  for (const double v : values) mean += v / static_cast<double>(values.size());
  double variance = 0.0;
  for (const double v : values) variance += (v - mean) * (v - mean) / static_cast<double>(values.size());
  for (double& v : values) v = (v - mean) / std::sqrt(variance);
}

}  // namespace

Problem simulate_strong(const StrongShape& shape) {
  std::mt19937_64 random(shape.seed);
  std::normal_distribution<double> normal;
  Shape size;
  size.n_predictors = shape.n_predictors;
  size.n_forms = shape.n_forms;
  size.n_rows = shape.n_rows;
  Problem problem = simulate(size);
  design::Data& data = problem.data;
  data.response_forms.resize(1);
  data.response_forms[0].kind = Kind::identity;
  problem.space.n_responses = 1;
  std::vector<double> signal(shape.n_rows, 0.0);
  for (std::size_t j = 0; j < shape.n_predictors; ++j) {
    design::Predictor& predictor = data.predictors[j];
    for (std::size_t f = 0; f < shape.n_forms; ++f) predictor.menu[f].kind = kForms.at(f);
    const double spread = 0.4 + 0.1 * static_cast<double>(j % 4);
    for (double& x : predictor.raw) x = std::exp(spread * normal(random));
    if (j >= shape.n_strong) continue;
    std::vector<double> effect;
    for (const double x : predictor.raw) effect.push_back(value_of((j + 1) % shape.n_forms, x));
    standardise(effect);
    const double size_of_effect = (0.6 + 0.1 * static_cast<double>(j)) * (j % 2 == 0 ? 1.0 : -1.0);
    for (std::size_t i = 0; i < shape.n_rows; ++i) signal[i] += size_of_effect * effect[i];
  }
  standardise(signal);
  for (std::size_t i = 0; i < shape.n_rows; ++i) data.response[i] = 10.0 + signal[i] + shape.noise * normal(random);
  std::shuffle(data.predictors.begin(), data.predictors.end(), random);
  return problem;
}

}  // namespace formsieve::bench

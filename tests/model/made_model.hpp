// Invented models for the tests of scoring, and the plain way to score one row by them.
#pragma once

#include "backtransform/backtransform.hpp"
#include "backtransform/intervals.hpp"
#include "model/scorer.hpp"

#include <Eigen/Core>

#include <algorithm>
#include <cmath>
#include <random>
#include <string>
#include <vector>

namespace formsieve::model::test {

/// A model and the training data that its plain oracle works from.
struct Made {
  Model model;
  Eigen::VectorXd residuals, weights;  ///< weights of size 0 for none
  std::vector<std::vector<double>> held_out;
  double level = 0.95;
};

inline std::vector<forms::Form> predictor_forms() {
  using forms::Kind;
  return {{Kind::ln},
          {Kind::sqrt, {}, 101.0},
          {Kind::reciprocal, {}, {}, 0.5},
          {Kind::spline, {1.0, 2.0, 4.0, 7.0}},
          {Kind::box_cox, {0.3}, {}, 1.0},
          {Kind::quadratic},
          {Kind::levels, {}, {}, 0.0, {"a", "b", "c"}, {}},
          {Kind::identity}};
}

/// Response form, terms, coefficients and residuals at random; the root is any upper triangle.
inline Made made_model(std::mt19937_64& random, const forms::Form& response, bool weighted, std::size_t n = 60) {
  std::normal_distribution<double> normal;
  std::uniform_real_distribution<double> uniform;
  Made made;
  Model& model = made.model;
  model.response = response;
  model.n = n;
  for (const forms::Form& form : predictor_forms())
    if (uniform(random) < 0.6) model.terms.push_back({"x" + std::to_string(model.terms.size()), form, 0.5, 90.0, {}});
  std::size_t p = 1;
  for (const Term& term : model.terms) p += forms::n_columns(term.form);
  model.coefficients.push_back(2.0 + uniform(random));
  for (std::size_t j = 1; j < p; ++j) model.coefficients.push_back(0.01 * normal(random));
  for (std::size_t i = 0; i < p; ++i)
    for (std::size_t j = i; j < p; ++j) model.root.push_back(0.02 * normal(random));
  model.sigma = 0.1 + uniform(random);
  model.largest_leverage = 0.05;
  made.residuals.resize(static_cast<Eigen::Index>(n));
  for (double& e : made.residuals) e = 0.3 * normal(random);
  if (weighted) {
    made.weights.resize(made.residuals.size());
    for (double& w : made.weights) w = 0.5 + uniform(random);
  }
  const backtransform::Smearing smearing(response, made.residuals, made.weights);
  MeanPart part;
  part.smallest = smearing.smallest_residual();
  part.first = smearing.moments().first;
  part.second = smearing.moments().second;
  part.third = smearing.moments().third;
  part.mean_exp = smearing.mean_exp();
  part.mean_cosh = smearing.mean_cosh();
  part.mean_sinh = smearing.mean_sinh();
  for (Eigen::Index i = 0; i < made.residuals.size(); ++i)
    part.residuals.push_back(made.residuals[i] * (weighted ? std::sqrt(made.weights[i]) : 1.0));
  model.mean.parts = {part};
  const std::size_t k = 3 + random() % 5;
  made.held_out.resize(k);
  for (std::size_t i = 0; i < n; ++i) made.held_out[i % k].push_back(0.5 * std::abs(normal(random)));
  for (auto& held : made.held_out) {
    std::sort(held.begin(), held.end());
    Fold fold{model.coefficients, held, {}};
    for (double& b : fold.coefficients) b += 0.02 * normal(random);
    model.folds.push_back(fold);
  }
  return made;
}

/// One row scored by the plain functions.
struct Plain {
  double mean, median, leverage;
  backtransform::Ends normal, cross;
};

inline Plain plain_score(const Made& made, const std::vector<double>& values, double weight) {
  const Model& model = made.model;
  const auto p = static_cast<Eigen::Index>(model.coefficients.size());
  Eigen::VectorXd x(p);
  x[0] = 1.0;
  Eigen::Index at = 1;
  for (std::size_t t = 0; t < model.terms.size(); ++t) {
    std::vector<double> columns(forms::n_columns(model.terms[t].form));
    forms::evaluate(model.terms[t].form, values[t], columns);
    for (const double column : columns) x[at++] = column;
  }
  Eigen::MatrixXd root = Eigen::MatrixXd::Zero(p, p);
  std::size_t next = 0;
  for (Eigen::Index i = 0; i < p; ++i)
    for (Eigen::Index j = i; j < p; ++j) root(i, j) = model.root[next++];
  const auto predicted = [&](const std::vector<double>& beta) {
    double eta = 0.0;
    for (Eigen::Index j = 0; j < p; ++j) eta += beta[static_cast<std::size_t>(j)] * x[j];
    return eta;
  };
  const double eta = predicted(model.coefficients);
  std::vector<double> of_folds;
  for (const Fold& fold : model.folds) of_folds.push_back(predicted(fold.coefficients));
  const bool weighted = made.weights.size() > 0;
  const backtransform::Smearing smearing(model.response, made.residuals, made.weights);
  const double leverage = backtransform::leverage_at(root.transpose(), x);
  return {
      smearing.mean(eta, weight), smearing.naive(eta), leverage,
      backtransform::NormalInterval(model.response, model.sigma, model.df(), made.level)
          .in_own_units(eta, leverage, weight),
      backtransform::CrossInterval(model.response, made.held_out, weighted, made.level).in_own_units(of_folds, weight)};
}

}  // namespace formsieve::model::test

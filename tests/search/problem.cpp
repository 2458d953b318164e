#include "problem.hpp"

#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <numeric>

namespace formsieve::test {

namespace {

using Real = long double;
using Matrix = Eigen::Matrix<Real, Eigen::Dynamic, Eigen::Dynamic>;
using Vector = Eigen::Matrix<Real, Eigen::Dynamic, 1>;

/// A column of one form: a power of the predictor for the first few, then noise on top so that all differ.
double form_value(double x, std::size_t index) {
  switch (index % 5) {
    case 0:
      return x;
    case 1:
      return std::log(x);
    case 2:
      return std::sqrt(x);
    case 3:
      return 1.0 / (x + 0.5);
    default:
      return x * x;
  }
}

std::vector<std::uint32_t> shuffled_folds(std::mt19937_64& random, std::size_t n_rows, std::size_t n_folds) {
  std::vector<std::uint32_t> fold(n_rows);
  for (std::size_t i = 0; i < n_rows; ++i) fold[i] = static_cast<std::uint32_t>(i % n_folds);
  std::shuffle(fold.begin(), fold.end(), random);
  return fold;
}

std::size_t n_folds_of(const std::vector<std::uint32_t>& fold_of) {
  return *std::max_element(fold_of.begin(), fold_of.end()) + std::size_t{1};
}

/// All columns and responses, standardised, in long double.
struct Standardised {
  Matrix values;
  std::vector<double> response_scale;
};

Standardised standardise(const Problem& problem, const Vector& weights) {
  const Eigen::Index n = problem.columns.rows();
  Matrix values(n, problem.columns.cols() + problem.responses.cols());
  values << problem.columns.cast<Real>(), problem.responses.cast<Real>();
  Standardised result;
  for (Eigen::Index c = 0; c < values.cols(); ++c) {
    values.col(c).array() -= values.col(c).dot(weights) / weights.sum();
    const auto scale = static_cast<double>(std::sqrt(values.col(c).cwiseAbs2().dot(weights) / weights.sum()));
    if (scale > 0.0) values.col(c) /= scale;
    if (c >= problem.columns.cols()) result.response_scale.push_back(scale);
  }
  result.values = values;
  return result;
}

/// Σ w (x − mean_of)(x − mean_of)ᵀ over rows whose `in` is 1, `mean_of` the weighted mean where `mean_in` is 1.
std::vector<double> gram(const Matrix& values, const Vector& weights, const Vector& in, const Vector& mean_in,
                         const Vector& mean_weights) {
  const Vector w = mean_weights.cwiseProduct(mean_in);
  const Vector mean = values.transpose() * w / w.sum();
  const Matrix centred = values.rowwise() - mean.transpose();
  const Matrix product = centred.transpose() * weights.cwiseProduct(in).asDiagonal() * centred;
  const Eigen::MatrixXd rounded = product.cast<double>();
  return {rounded.data(), rounded.data() + rounded.size()};
}

/// Residual sum of squares of the rows in `out` of a fit to the rows in `in`; `weighted` says how to add them up.
double refit_sse(const Matrix& x, const Vector& y, const Vector& weights, const std::vector<Eigen::Index>& in,
                 const std::vector<Eigen::Index>& out, bool weighted) {
  const Vector root = weights(in).cwiseSqrt();
  const Matrix x_in = root.asDiagonal() * Matrix(x(in, Eigen::all));
  const Vector coefficients = x_in.colPivHouseholderQr().solve(root.cwiseProduct(Vector(y(in))));
  const Vector residual = Vector(y(out)) - x(out, Eigen::all) * coefficients;
  const Vector w = weighted ? Vector(weights(out)) : Vector::Ones(residual.size());
  return static_cast<double>(residual.cwiseAbs2().dot(w));
}

Vector weights_of(const Problem& problem) {
  Vector weights = Vector::Ones(problem.columns.rows());
  for (std::size_t i = 0; i < problem.weights.size(); ++i) weights(static_cast<Eigen::Index>(i)) = problem.weights[i];
  return weights;
}

}  // namespace

double uniform(std::mt19937_64& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }

double normal(std::mt19937_64& random) {
  return std::sqrt(-2.0 * std::log(uniform(random))) * std::cos(6.283185307179586 * uniform(random));
}

Problem make_problem(std::uint64_t seed, std::size_t n_rows, const std::vector<Shape>& shapes, std::size_t n_responses,
                     std::size_t n_folds, std::size_t repeats) {
  std::mt19937_64 random(seed);
  Problem problem;
  problem.space.n_responses = n_responses;
  std::size_t n_columns = 0;
  for (const Shape& shape : shapes) {
    search::PredictorChoices choices;
    choices.always = shape.always;
    for (const std::size_t width : shape.form_columns) {
      choices.forms.push_back({n_columns, width});
      n_columns += width;
    }
    problem.space.predictors.push_back(choices);
  }
  problem.columns.resize(static_cast<Eigen::Index>(n_rows), static_cast<Eigen::Index>(n_columns));
  problem.responses.resize(static_cast<Eigen::Index>(n_rows), static_cast<Eigen::Index>(n_responses));
  for (Eigen::Index i = 0; i < problem.columns.rows(); ++i) {
    double linear = 0.0;
    Eigen::Index c = 0;
    for (std::size_t j = 0; j < shapes.size(); ++j) {
      const double x = std::exp(0.7 * normal(random));
      if (j % 2 == 0) linear += std::log(x) / static_cast<double>(j + 1);
      std::size_t index = 0;
      for (const std::size_t width : shapes[j].form_columns)
        for (std::size_t k = 0; k < width; ++k)
          problem.columns(i, c++) = form_value(x, index++) + 0.02 * normal(random);
    }
    for (std::size_t r = 0; r < n_responses; ++r)
      problem.responses(i, static_cast<Eigen::Index>(r)) =
          (1.0 + static_cast<double>(r)) * linear + 0.4 * normal(random);
  }
  for (std::size_t repeat = 0; repeat < repeats; ++repeat)
    problem.fold_of.push_back(shuffled_folds(random, n_rows, n_folds));
  return problem;
}

base::GramSet grams_of(const Problem& problem) {
  const Vector weights = weights_of(problem);
  const Vector ones = Vector::Ones(weights.size());
  const Standardised rows = standardise(problem, weights);
  base::GramSet set;
  set.n_rows = static_cast<std::size_t>(problem.columns.rows());
  set.n_columns = static_cast<std::size_t>(problem.columns.cols());
  set.n_responses = static_cast<std::size_t>(problem.responses.cols());
  set.response_scale = rows.response_scale;
  set.all = gram(rows.values, weights, ones, ones, weights);
  for (const auto& fold_of : problem.fold_of) {
    for (std::uint32_t fold = 0; fold < n_folds_of(fold_of); ++fold) {
      Vector held_out(weights.size());
      for (Eigen::Index i = 0; i < held_out.size(); ++i)
        held_out(i) = fold_of[static_cast<std::size_t>(i)] == fold ? 1.0L : 0.0L;
      const Vector training = ones - held_out;
      set.training.push_back(gram(rows.values, weights, training, training, weights));
      set.validation.push_back(gram(rows.values, ones, held_out, training, weights));
    }
  }
  set.n_folds = set.training.size();
  return set;
}

Refit refit(const Problem& problem, const search::Choice& choice) {
  std::vector<Eigen::Index> picked;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const search::FormBlock& block = problem.space.predictors[j].forms[choice.choice[j] - 1u];
    for (std::size_t c = 0; c < block.n_columns; ++c)
      picked.push_back(static_cast<Eigen::Index>(block.first_column + c));
  }
  const Eigen::Index n = problem.columns.rows();
  Matrix x(n, static_cast<Eigen::Index>(picked.size()) + 1);
  x << Vector::Ones(n), Matrix(problem.columns(Eigen::all, picked).cast<Real>());
  const Vector y = problem.responses.col(static_cast<Eigen::Index>(choice.response)).cast<Real>();
  const Vector weights = weights_of(problem);

  Refit result{choice, 0.0, 0.0, picked.size()};
  std::vector<Eigen::Index> every(static_cast<std::size_t>(n));
  std::iota(every.begin(), every.end(), Eigen::Index{0});
  result.rss = refit_sse(x, y, weights, every, every, true);
  for (const auto& fold_of : problem.fold_of) {
    for (std::uint32_t fold = 0; fold < n_folds_of(fold_of); ++fold) {
      std::vector<Eigen::Index> in;
      std::vector<Eigen::Index> out;
      for (const Eigen::Index i : every) (fold_of[static_cast<std::size_t>(i)] == fold ? out : in).push_back(i);
      result.cv_sse += refit_sse(x, y, weights, in, out, false);
    }
  }
  return result;
}

std::vector<search::Choice> all_choices(const search::Space& space) {
  std::vector<search::Choice> found;
  search::Choice choice;
  choice.choice.assign(space.predictors.size(), 0);
  const auto admitted = [&] {
    std::size_t terms = 0;
    for (std::size_t j = 0; j < choice.choice.size(); ++j) {
      if (choice.choice[j] != 0) ++terms;
      if (space.predictors[j].always && choice.choice[j] == 0) return false;
    }
    return !space.max_terms || terms <= *space.max_terms;
  };
  for (choice.response = 0; choice.response < space.n_responses; ++choice.response) {
    for (bool carried = false; !carried;) {
      if (admitted()) found.push_back(choice);
      carried = true;
      for (std::size_t j = choice.choice.size(); carried && j-- > 0;) {
        carried = choice.choice[j] == space.predictors[j].forms.size();
        choice.choice[j] = carried ? std::uint16_t{0} : static_cast<std::uint16_t>(choice.choice[j] + 1);
      }
    }
  }
  return found;
}

std::vector<Refit> refit_all(const Problem& problem) {
  std::vector<Refit> all;
  for (const search::Choice& choice : all_choices(problem.space)) all.push_back(refit(problem, choice));
  return all;
}

search::WalkOptions keep_all(const search::Space& space, double penalty_per_column) {
  const auto n_candidates = search::count(space).convert_to<std::size_t>();
  std::size_t n_columns = 0;
  for (const auto& predictor : space.predictors)
    for (const auto& form : predictor.forms) n_columns += form.n_columns;
  std::vector<double> penalty;
  for (std::size_t k = 0; k <= n_columns; ++k) penalty.push_back(penalty_per_column * static_cast<double>(k));
  search::WalkOptions options;
  options.threads = 1;
  options.rules = {{search::Score::cv_sse, n_candidates, {}}, {search::Score::penalised_rss, n_candidates, penalty}};
  return options;
}

}  // namespace formsieve::test

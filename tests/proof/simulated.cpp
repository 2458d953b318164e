#include "simulated.hpp"

#include <Eigen/Core>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>

namespace formsieve::test {

namespace {

using Random = std::mt19937_64;

/// Standard normal predictors, neighbours correlated.
Eigen::MatrixXd normal_predictors(const SimulatedOptions& o, Random& random, std::normal_distribution<double>& normal) {
  Eigen::MatrixXd z(o.n_rows, o.n_predictors);
  for (int i = 0; i < o.n_rows; ++i) {
    double previous = normal(random);
    for (int p = 0; p < o.n_predictors; ++p) {
      if (p > 0) previous = o.correlation * previous + std::sqrt(1 - o.correlation * o.correlation) * normal(random);
      z(i, p) = previous;
    }
  }
  return z;
}

/// Lognormal for even predictors, about gamma (Wilson and Hilferty 1931) for odd ones.
double skewed(const SimulatedOptions& o, int p, double z) {
  if (p % 2 == 0) return std::exp(o.spread * (0.4 + 0.3 * ((p / 2) % 3) / 2.0) * z);
  const double a = 3 + (p / 2) % 3 * 2;
  const double w = 1 - 1 / (9 * a) + o.spread * z / (3 * std::sqrt(a));
  return std::max(a * w * w * w, 0.02);
}

Eigen::MatrixXd design(const SimulatedOptions& o, const Eigen::MatrixXd& z) {
  Eigen::MatrixXd columns(o.n_rows, o.n_predictors * o.n_forms);
  for (int p = 0; p < o.n_predictors; ++p) {
    for (int i = 0; i < o.n_rows; ++i) {
      const double x = skewed(o, p, z(i, p));
      const double forms[6] = {x, std::sqrt(x), std::log(x), 1 / x, x * x, 1 / std::sqrt(x)};
      for (int t = 0; t < o.n_forms; ++t) columns(i, p * o.n_forms + t) = forms[t];
    }
  }
  for (Eigen::Index c = 0; c < columns.cols(); ++c) {
    columns.col(c).array() -= columns.col(c).mean();
    columns.col(c) /= columns.col(c).norm();
  }
  return columns;
}

Eigen::VectorXd response(const SimulatedOptions& o, const Eigen::MatrixXd& columns, Random& random,
                         std::normal_distribution<double>& normal) {
  std::uniform_real_distribution<double> uniform(0, 1);
  const int n_active = o.n_active >= 0 ? o.n_active : (o.n_predictors + 1) / 3;
  std::vector<int> order(static_cast<std::size_t>(o.n_predictors));
  for (int p = 0; p < o.n_predictors; ++p) order[static_cast<std::size_t>(p)] = p;
  std::shuffle(order.begin(), order.end(), random);
  Eigen::VectorXd y = Eigen::VectorXd::Zero(o.n_rows);
  for (int q = 0; q < n_active; ++q) {
    const int form = 1 + static_cast<int>(uniform(random) * (o.n_forms - 1));
    const double size = 0.5 + uniform(random);
    const double sign = uniform(random) < 0.5 ? -1 : 1;
    y += size * sign * columns.col(order[static_cast<std::size_t>(q)] * o.n_forms + form);
  }
  Eigen::VectorXd noise(o.n_rows);
  for (int i = 0; i < o.n_rows; ++i) noise(i) = normal(random);
  noise.array() -= noise.mean();
  if (n_active > 0) noise *= std::sqrt(y.squaredNorm() * (1 - o.r_squared) / o.r_squared / noise.squaredNorm());
  y += noise;
  y.array() -= y.mean();
  return y / y.norm();
}

/// Response forms ln, √ and identity of exp(spread · response), all of unit length, and what to add to their scores:
/// 2 ln(length) n − 2 ln(Jacobian), less that of the first.
Eigen::MatrixXd response_forms(const Eigen::VectorXd& response, int n_responses, std::vector<double>& constant) {
  constexpr double kSpread = 0.3;
  const auto n = static_cast<double>(response.size());
  const Eigen::ArrayXd log_own = kSpread * std::sqrt(n) * response.array();
  const double power[3] = {0.0, 0.5, 1.0};
  Eigen::MatrixXd forms(response.size(), n_responses);
  forms.col(0) = response;
  constant = {0.0};
  const double first = n * std::log(log_own.square().sum()) + 2.0 * log_own.sum();
  for (int r = 1; r < n_responses; ++r) {
    Eigen::ArrayXd form = (power[r] * log_own).exp();
    form -= form.mean();
    const double log_jacobian = n * std::log(power[r]) + (power[r] - 1.0) * log_own.sum();
    constant.push_back(n * std::log(form.square().sum()) - 2.0 * log_jacobian - first);
    forms.col(r) = form / std::sqrt(form.square().sum());
  }
  return forms;
}

}  // namespace

std::vector<double> penalty_of(const std::string& criterion, std::size_t n_rows, std::size_t most_columns) {
  const auto n = static_cast<double>(n_rows);
  std::vector<double> penalty;
  for (std::size_t k = 0; k <= most_columns; ++k) {
    const double q = static_cast<double>(k) + 2.0;
    if (criterion == "AIC")
      penalty.push_back(2.0 * (q - 1.0));
    else if (criterion == "BIC")
      penalty.push_back(std::log(n) * (q - 1.0));
    else
      penalty.push_back(n - q - 1.0 > 0.0 ? 2.0 * q + 2.0 * q * (q + 1.0) / (n - q - 1.0)
                                          : std::numeric_limits<double>::infinity());
  }
  return penalty;
}

Simulated simulate(const SimulatedOptions& o) {
  Random random(static_cast<std::uint64_t>(o.seed) * 7919 + static_cast<std::uint64_t>(o.n_predictors) * 31 +
                static_cast<std::uint64_t>(o.n_forms) * 17 + static_cast<std::uint64_t>(o.n_rows));
  std::normal_distribution<double> normal;
  const Eigen::MatrixXd columns = design(o, normal_predictors(o, random, normal));
  Simulated result;
  Eigen::MatrixXd rows(o.n_rows, columns.cols() + o.n_responses);
  rows << columns, response_forms(response(o, columns, random, normal), o.n_responses, result.problem.constant);
  const Eigen::MatrixXd gram = rows.transpose() * rows;
  result.grams.n_rows = static_cast<std::size_t>(o.n_rows);
  result.grams.n_columns = static_cast<std::size_t>(columns.cols());
  result.grams.n_responses = static_cast<std::size_t>(o.n_responses);
  result.space.n_responses = result.grams.n_responses;
  result.grams.response_scale.assign(result.grams.n_responses, 1.0);
  result.grams.all.assign(gram.data(), gram.data() + gram.size());
  for (int p = 0; p < o.n_predictors; ++p) {
    search::PredictorChoices choices;
    for (int t = 0; t < o.n_forms; ++t) choices.forms.push_back({static_cast<std::size_t>(p * o.n_forms + t), 1});
    result.space.predictors.push_back(choices);
  }
  result.problem.penalty = penalty_of(o.criterion, result.grams.n_rows, result.space.predictors.size());
  return result;
}

}  // namespace formsieve::test

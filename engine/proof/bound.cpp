#include "proof/bound.hpp"

#include "proof/prove.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr double kUnitRoundoff = std::numeric_limits<double>::epsilon() / 2;
/// Exponent beyond which a factor is cut: less is a valid bound, and exp must not overflow.
constexpr double kLargestExponent = 300.0;

/// gᵀD_ff⁻¹g for every g within `error` of the given one; +infinity when D_ff is not positive definite. For a wide form
/// the factor is that of a matrix off by at most γ_{q+1} trace(D_ff) in norm.
double largest_gain(const Eigen::MatrixXd& d, const OpenForm& form, const Eigen::VectorXd& g, double error) {
  if (form.n_columns == 1) {
    const double diagonal = d(form.first, form.first);
    const double most = std::abs(g(form.first)) + error;
    return diagonal > 0.0 ? most * most / diagonal * (1.0 + 8.0 * kUnitRoundoff) : kInfinity;
  }
  const Eigen::Index q = form.n_columns;
  const Eigen::MatrixXd block = d.block(form.first, form.first, q, q);
  const Eigen::LLT<Eigen::MatrixXd> factor(block);
  if (factor.info() != Eigen::Success) return kInfinity;
  const Eigen::MatrixXd inverse = factor.matrixL().solve(Eigen::MatrixXd::Identity(q, q));
  const double inverse_norm = inverse.squaredNorm();
  const double rounding = 8.0 * static_cast<double>(q + 3) * kUnitRoundoff * block.trace() * inverse_norm;
  if (!(rounding < 0.5)) return kInfinity;
  const double length =
      (inverse * g.segment(form.first, q)).norm() + error * std::sqrt(static_cast<double>(q) * inverse_norm);
  return length * length * (1.0 + 2.0 * rounding);
}

}  // namespace

DualValue dual_value(const Reduced& problem, const CertifiedDifference& z, const Eigen::MatrixXd& d,
                     const Eigen::VectorXd& v) {
  const Eigen::VectorXd zv = z.z() * v;
  const Eigen::VectorXd g = problem.b - zv;
  const double length = v.cwiseAbs().sum();
  const double largest_z = z.z().diagonal().maxCoeff();  // positive definite: no entry is larger
  const double largest_b = problem.b.cwiseAbs().maxCoeff();
  const auto order = static_cast<double>(v.size());
  const double g_error =
      z.entry_error() * (1.0 + length) + (order + 2.0) * kUnitRoundoff * (largest_b + largest_z * length);
  const double quadratic = v.dot(zv);
  const double quadratic_error = (z.entry_error() + (2.0 * order + 4.0) * kUnitRoundoff * largest_z) * length * length;
  DualValue value;
  double total = 0.0;
  for (const OpenPredictor& predictor : problem.open) {
    std::vector<double> gains;
    for (const OpenForm& form : predictor.forms) gains.push_back(largest_gain(d, form, g, g_error));
    total += *std::max_element(gains.begin(), gains.end());
    value.gains.push_back(std::move(gains));
  }
  // the sums over predictors that are formed later round by less than this too
  const double summing = 4.0 * (order + 4.0) * kUnitRoundoff * (std::abs(problem.yy) + std::abs(quadratic) + total);
  value.base = problem.yy - quadratic - (problem.entry_error + quadratic_error + summing);
  if (!std::isfinite(value.base)) {  // says nothing; sums of infinite gains would not even say that
    value.base = -kInfinity;
    for (std::vector<double>& gains : value.gains) std::fill(gains.begin(), gains.end(), 0.0);
  }
  return value;
}

BoundEvaluator::BoundEvaluator(const RootGram& root, const Reduced& problem, const CountRange& range)
    : root_(&root), problem_(&problem), counted_(problem, range) {
  const std::vector<double>& penalty = root.problem().penalty;
  const auto n_rows = static_cast<double>(root.problem().grams->n_rows);
  const std::size_t fixed = problem.fixed_columns;
  const double reference = fixed < penalty.size() ? penalty[fixed] : kInfinity;
  reference_score_ = root.score(problem.response, 1.0, fixed);
  for (std::size_t k = 0; k <= counted_.most_columns(); ++k) {
    const bool allowed = fixed + k < penalty.size() && std::isfinite(penalty[fixed + k]);
    factor_.push_back(allowed ? std::exp(std::min((penalty[fixed + k] - reference) / n_rows, kLargestExponent))
                              : kInfinity);
  }
}

double BoundEvaluator::score(double scaled_rss) const {
  if (scaled_rss == kInfinity) return kInfinity;
  return static_cast<double>(root_->problem().grams->n_rows) * std::log(scaled_rss) + reference_score_;
}

double BoundEvaluator::lowest(double base, const Sums& sums, Columns range, std::size_t more_terms,
                              std::size_t more_columns) const {
  double lowest = kInfinity;
  const auto minus = [](std::size_t a, std::size_t b) { return a > b ? a - b : 0; };
  const Eigen::Index first = counted_.by_terms() ? minus(counted_.fewest_terms(), more_terms) : 0;
  const Eigen::Index last = sums.rows() - static_cast<Eigen::Index>(counted_.by_terms() ? more_terms : 0);
  for (std::size_t k = minus(range.fewest, more_columns); k + more_columns <= range.most; ++k) {
    const double factor = factor_[k + more_columns];
    if (factor == kInfinity) continue;
    double sum = -kInfinity;
    for (Eigen::Index t = first; t < last; ++t) sum = std::max(sum, sums(t, static_cast<Eigen::Index>(k)));
    if (sum == -kInfinity) continue;
    lowest = std::min(lowest, std::max(base - sum, kExactFit_rel) * factor);
  }
  return lowest;
}

Bound BoundEvaluator::lower(const DualValue& value, double threshold) const {
  Bound bound;
  const Sums sums = counted_.all(value.gains);
  bound.lower = score(lowest(value.base, sums, {counted_.fewest_columns(), counted_.most_columns()}, 0, 0));
  bound.fewest_columns = std::numeric_limits<std::size_t>::max();
  for (std::size_t k = counted_.fewest_columns(); k <= counted_.most_columns(); ++k) {
    const auto first = static_cast<Eigen::Index>(counted_.by_terms() ? counted_.fewest_terms() : 0);
    if (first >= sums.rows() || factor_[k] == kInfinity) continue;
    const double sum = sums.col(static_cast<Eigen::Index>(k)).tail(sums.rows() - first).maxCoeff();
    if (sum == -kInfinity) continue;
    if (score(std::max(value.base - sum, kExactFit_rel) * factor_[k]) > threshold + kTolerance) continue;
    const std::size_t columns = problem_->fixed_columns + k;
    bound.fewest_columns = std::min(bound.fewest_columns, columns);
    bound.most_columns = std::max(bound.most_columns, columns);
  }
  return bound;
}

Bound BoundEvaluator::operator()(const DualValue& value, double threshold) const {
  Bound bound = lower(value, threshold);
  if (bound.fewest_columns > bound.most_columns) return bound;
  const Columns range{bound.fewest_columns - problem_->fixed_columns, bound.most_columns - problem_->fixed_columns};
  const std::vector<Sums> others = counted_.without_each(value.gains);
  for (std::size_t j = 0; j < problem_->open.size(); ++j) {
    const OpenPredictor& predictor = problem_->open[j];
    std::vector<double> actions;
    for (std::size_t f = 0; f < predictor.forms.size(); ++f)
      actions.push_back(score(lowest(value.base - value.gains[j][f], others[j], range, 1,
                                     static_cast<std::size_t>(predictor.forms[f].n_columns))));
    actions.push_back(predictor.must ? kInfinity : score(lowest(value.base, others[j], range, 0, 0)));
    for (double& action : actions) action = std::max(action, bound.lower);
    bound.action.push_back(std::move(actions));
  }
  return bound;
}

}  // namespace formsieve::proof

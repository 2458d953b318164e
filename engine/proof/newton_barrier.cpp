#include "proof/newton_barrier.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

namespace formsieve::proof {

namespace {

constexpr double kOutside = -std::numeric_limits<double>::infinity();
/// The bound on λ: so many times the sum of squares that is left, or the λ at the start.
constexpr double kMostLambda_rel = 10.0;
/// Halvings of a bracket whose ends differ by a factor of order one from the root's distance to the bound.
constexpr int kHalvings = 40;

/// ln det D_ff and g_fᵀ D_ff⁻¹ g_f of one form; the latter is NaN where D_ff is not positive definite.
struct FormValue {
  double log_determinant = 0.0;
  double charge = 0.0;
};

/// Cholesky's method by rows on [D_ff g_f]: the last row becomes (L⁻¹g_f)ᵀ.
FormValue form_of_columns(const OpenForm& form, const Variables& at, std::vector<double>& work) {
  const Eigen::Index n = form.n_columns;
  work.resize(static_cast<std::size_t>((n + 1) * n));
  Eigen::Map<Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>> rows(work.data(), n + 1, n);
  FormValue value;
  for (Eigen::Index i = 0; i <= n; ++i) {
    for (Eigen::Index k = 0; k < std::min(i, n); ++k) {
      const double entry = i < n ? at.d(form.first + i, form.first + k) : at.g(form.first + k);
      rows(i, k) = (entry - rows.row(i).head(k).dot(rows.row(k).head(k))) / rows(k, k);
    }
    if (i == n) break;
    const double pivot = at.d(form.first + i, form.first + i) - rows.row(i).head(i).squaredNorm();
    if (!(pivot > 0.0)) return {0.0, std::nan("")};
    rows(i, i) = std::sqrt(pivot);
    value.log_determinant += std::log(pivot);
  }
  value.charge = rows.row(n).squaredNorm();
  return value;
}

FormValue form_value(const OpenForm& form, const Variables& at, std::vector<double>& work) {
  if (form.n_columns > 1) return form_of_columns(form, at, work);
  const double d = at.d(form.first, form.first), g = at.g(form.first);
  if (!(d > 0.0)) return {0.0, std::nan("")};
  return {std::log(d), g * g / d};
}

/// The t in (0, most] at which a falling function crosses zero.
template <class Function>
double crossing(double most, const Function& falling) {
  double below = 0.0, above = most;
  for (int i = 0; i < kHalvings; ++i) {
    const double middle = 0.5 * (below + above);
    (falling(middle) > 0.0 ? below : above) = middle;
  }
  return above;
}

/// u of one predictor: −u + μ[ln u + Σ_f ln(u + c_f λ − h_f)] is largest, the first logarithm only where it may be
/// absent. NaN where a D_ff is not positive definite. `bounds` and `work` hold anything.
double central_u(const OpenPredictor& predictor, double mu, const Variables& at, std::vector<double>& bounds,
                 std::vector<double>& work) {
  bounds.clear();
  if (!predictor.must) bounds.push_back(0.0);
  for (const OpenForm& form : predictor.forms) {
    bounds.push_back(form_value(form, at, work).charge - static_cast<double>(form.n_columns) * at.lambda);
    if (std::isnan(bounds.back())) return bounds.back();
  }
  const double lowest = *std::max_element(bounds.begin(), bounds.end());
  return lowest + crossing(mu * static_cast<double>(bounds.size()), [&](double above_lowest) {
           double sum = 0.0;
           for (const double bound : bounds) sum += 1.0 / (lowest - bound + above_lowest);
           return mu * sum - 1.0;
         });
}

double central_s(const Prices& prices, double mu, const Variables& at) {
  const double fewest = prices.k_fewest * at.lambda + prices.tau_fewest;
  const double most = prices.k_most * at.lambda + prices.tau_most;
  const double lowest = std::max(fewest, most);
  return lowest + crossing(2.0 * mu, [&](double t) {
           return mu * (1.0 / (lowest - fewest + t) + 1.0 / (lowest - most + t)) - 1.0;
         });
}

double prices_barrier(const Prices& prices, const Variables& at) {
  const double fewest = prices.slack_fewest(at), most = prices.slack_most(at);
  const double to_bound = prices.most_lambda - at.lambda;
  if (!(fewest > 0.0 && most > 0.0 && at.lambda > 0.0 && to_bound > 0.0)) return kOutside;
  return std::log(fewest) + std::log(most) + std::log(at.lambda) + std::log(to_bound);
}

/// M − D = LLᵀ and L⁻¹(b − g); false where it is not positive definite.
bool factor_here(const Reduced& problem, const Variables& at, Factor& factor) {
  factor.lower.set_lower(problem.m);
  auto difference = factor.lower.matrix();
  for (const OpenPredictor& predictor : problem.open) {
    const Eigen::Index i = predictor.first, n = predictor.n_columns;
    difference.block(i, i, n, n) -= at.d.block(i, i, n, n);  // above the diagonal anything
  }
  if (!factor_lower(factor.lower)) return false;
  factor.residual.assign(factor.lower.padded_order() / kLineLanes, Line());
  Eigen::Map<Eigen::VectorXd>(factor.residual_data(), problem.b.size()) = problem.b - at.g;
  solve_lower(factor.lower, factor.residual_data());
  return true;
}

/// Σ over the forms of ln det [[D_ff, g_f], [g_fᵀ, u + c_f λ]] of one predictor, plus ln u where it may be absent;
/// −infinity outside the domain. `work` holds anything.
double predictor_barrier(const OpenPredictor& predictor, double u, const Variables& at, std::vector<double>& work) {
  if (!predictor.must && !(u > 0.0)) return kOutside;
  double sum = predictor.must ? 0.0 : std::log(u);
  for (const OpenForm& form : predictor.forms) {
    const FormValue value = form_value(form, at, work);
    const double slack = u + static_cast<double>(form.n_columns) * at.lambda - value.charge;
    if (!(slack > 0.0)) return kOutside;  // NaN too
    sum += value.log_determinant + std::log(slack);
  }
  return sum;
}

}  // namespace

void Variables::set_along(const Variables& point, double length, const Variables& direction, const Reduced& problem) {
  for (const OpenPredictor& predictor : problem.open) {
    const Eigen::Index i = predictor.first, n = predictor.n_columns;
    d.block(i, i, n, n) = point.d.block(i, i, n, n) + length * direction.d.block(i, i, n, n);
  }
  g = point.g + length * direction.g;
  u = point.u + length * direction.u;
  lambda = point.lambda + length * direction.lambda;
  s = point.s + length * direction.s;
}

Prices::Prices(const Reduced& problem, const ColumnRange& range, double lambda)
    : tau_fewest(range.tau_fewest),
      tau_most(range.tau_most),
      most_lambda(kMostLambda_rel * std::max(problem.yy, lambda)) {
  const auto open = [&](std::size_t k) { return static_cast<double>(k - std::min(k, problem.fixed_columns)); };
  k_fewest = open(range.fewest);
  k_most = open(range.most);
}

double merit(const Reduced& problem, const Prices& prices, double mu, const Variables& at, Factor& factor) {
  double barrier = prices_barrier(prices, at);
  for (std::size_t j = 0; j < problem.open.size() && barrier > kOutside; ++j)
    barrier += predictor_barrier(problem.open[j], at.u(static_cast<Eigen::Index>(j)), at, factor.work);
  if (!(barrier > kOutside)) return kOutside;
  if (!factor_here(problem, at, factor)) return kOutside;
  const auto n = problem.b.size();
  barrier += 2.0 * factor.lower.matrix().diagonal().array().log().sum();
  const Eigen::Map<const Eigen::VectorXd> residual(factor.residual_data(), n);
  const double value = problem.yy - residual.squaredNorm() - at.u.sum() - at.s + mu * barrier;
  return std::isfinite(value) ? value : kOutside;
}

bool centre(const Reduced& problem, const Prices& prices, double mu, Variables& at) {
  std::vector<double> bounds, work;
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    const double u = central_u(problem.open[j], mu, at, bounds, work);
    if (!std::isfinite(u)) return false;
    at.u(static_cast<Eigen::Index>(j)) = u;
  }
  at.s = central_s(prices, mu, at);
  return std::isfinite(at.s);
}

}  // namespace formsieve::proof

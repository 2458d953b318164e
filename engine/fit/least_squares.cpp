#include "fit/least_squares.hpp"

#include "base/sums.hpp"
#include "fit/centred_factor.hpp"
#include "fit/input_check.hpp"
#include "fit/refinement.hpp"

#include <cmath>
#include <limits>
#include <vector>

namespace formsieve::fit {

namespace {

using ConstMatrix = Eigen::Ref<const Eigen::MatrixXd>;
using ConstVector = Eigen::Ref<const Eigen::VectorXd>;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Below this relative pivot the factorisation is done again in long double: in double, standard errors and leverages
/// lose about −log10 of it of their sixteen digits, and from here on twelve would no longer be left.
constexpr double kNearlyDependent = 1e-4;

/// Residuals of this many ε of the response, in root mean square, are the rounding of the response itself.
constexpr double kExactWithin = 4.0 * std::numeric_limits<double>::epsilon();

/// Σ w_i v_i²
long double weighted_square_sum(const Vector<long double>& v, const ConstVector& weights) {
  long double total = 0.0L;
  for (Eigen::Index i = 0; i < v.size(); ++i) total += (weights.size() == 0 ? 1.0L : weights(i)) * v(i) * v(i);
  return total;
}

double weighted_tss(const ConstVector& y, const ConstVector& weights) {
  Vector<long double> centred = y.cast<long double>();
  const bool weighted = weights.size() != 0;
  for (int pass = 0; pass < 2; ++pass) {  // the second pass removes the rounding of the first mean
    centred.array() -= weighted ? weights.cast<long double>().dot(centred) / weights.cast<long double>().sum()
                                : centred.sum() / static_cast<long double>(y.size());
  }
  return static_cast<double>(weighted_square_sum(centred, weights));
}

bool is_exact(long double rss, const ConstVector& y, const ConstVector& weights) {
  const Vector<long double> response = y.cast<long double>();
  return rss <= static_cast<long double>(kExactWithin * kExactWithin) * weighted_square_sum(response, weights);
}

/// Coefficients, fitted values, residuals and sums of squares.
void set_solution(const RefinedSolution& solution, const ConstMatrix& x, const ConstVector& y,
                  const ConstVector& weights, Fit& fit) {
  const long double rss = weighted_square_sum(solution.residuals_form, weights);
  const bool saturated = x.rows() == x.cols();
  const bool exact = saturated || is_exact(rss, y, weights);
  fit.coefficients = solution.coefficients.cast<double>();
  fit.residuals = exact ? Eigen::VectorXd::Zero(y.size()) : Eigen::VectorXd(solution.residuals_form.cast<double>());
  fit.fitted = (y.cast<long double>() - solution.residuals_form).cast<double>();
  if (exact) fit.fitted = y;
  fit.rss = exact ? 0.0 : static_cast<double>(rss);
  fit.tss = weighted_tss(y, weights);
  fit.sigma = saturated ? kNaN : std::sqrt(fit.rss / static_cast<double>(x.rows() - x.cols()));
}

/// The whitened residual over 1 − h_i, what the row's residual is when it is left out; NaN where the row determines its
/// own fitted value.
Eigen::VectorXd deleted_residuals(const ConstVector& weights, const Fit& fit) {
  Eigen::VectorXd deleted(fit.residuals.size());
  for (Eigen::Index i = 0; i < deleted.size(); ++i) {
    const double whitened = fit.residuals(i) * (weights.size() == 0 ? 1.0 : std::sqrt(weights(i)));
    const double left = 1.0 - fit.leverage(i);
    deleted(i) = left > kOwnFit ? whitened / left : kNaN;
  }
  return deleted;
}

/// HC3 of one coefficient: √Σ (u_i c_i)², u_i the deleted residuals and c_i its row in A(AᵀA)⁻¹, here over their norm.
double robust_se(const Eigen::VectorXd& influence_rel, const Eigen::VectorXd& deleted) {
  std::vector<double> squares(static_cast<std::size_t>(deleted.size()));
  for (Eigen::Index i = 0; i < deleted.size(); ++i) {
    const bool without_bearing = std::isnan(deleted(i)) && std::abs(influence_rel(i)) <= kNoInfluence;
    const double moved = without_bearing ? 0.0 : deleted(i) * influence_rel(i);
    squares[static_cast<std::size_t>(i)] = moved * moved;
  }
  return std::sqrt(base::sum(squares));
}

/// Covariance, standard errors and leverages. A coefficient's standard error is σ times the length of its row of T,
/// formed without its square, which may be no double.
template <class Scalar>
void set_uncertainty(const CentredFactor<Scalar>& factor, const ConstVector& weights, Fit& fit) {
  const Matrix<Scalar> q = factor.thin_q();
  const Matrix<Scalar> root = factor.inverse_root();
  fit.leverage = q.rowwise().squaredNorm().template cast<double>().cwiseMin(1.0);
  const Eigen::VectorXd deleted = deleted_residuals(weights, fit);
  const Matrix<Scalar> scaled = root * static_cast<Scalar>(fit.sigma);
  // lazyProduct: plain sums in a fixed order, whatever the machine's caches.
  fit.covariance = scaled.lazyProduct(scaled.transpose()).template cast<double>();
  fit.se.resize(root.rows());
  fit.se_robust.setConstant(root.rows(), kNaN);
  for (Eigen::Index j = 0; j < root.rows(); ++j) {
    const auto length = static_cast<double>(root.row(j).stableNorm());
    fit.se(j) = length * fit.sigma;
    if (std::isnan(fit.sigma)) continue;
    const Vector<Scalar> influence_rel = q.lazyProduct(root.row(j).transpose() / static_cast<Scalar>(length));
    fit.se_robust(j) = length * robust_se(influence_rel.template cast<double>(), deleted);
  }
}

template <class Scalar>
Fit fit_with(const CentredFactor<Scalar>& factor, const ConstMatrix& x, const ConstVector& y,
             const ConstVector& weights) {
  Fit fit;
  fit.rank = static_cast<std::size_t>(x.cols());
  set_solution(refined_solution(factor, x, y, weights), x, y, weights, fit);
  set_uncertainty(factor, weights, fit);
  return fit;
}

}  // namespace

Result<Fit> least_squares(const ConstMatrix& x, const ConstVector& y, const ConstVector& weights) {
  if (const Status input = check_input(x, y, weights); !input.ok()) return input.error();
  const CentredFactor<double> factor(x, weights);
  if (const Eigen::Index column = factor.dependent_column(); column != 0) {
    return dependent_column_error(column, column == factor.constant_column());
  }
  if (factor.smallest_pivot_rel() < kNearlyDependent) {
    return fit_with(CentredFactor<long double>(x, weights), x, y, weights);
  }
  return fit_with(factor, x, y, weights);
}

}  // namespace formsieve::fit

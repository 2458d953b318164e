#include "checks/workings.hpp"

#include "base/sums.hpp"

#include <Eigen/QR>

#include <cmath>
#include <limits>
#include <span>

namespace formsieve::checks {

namespace {

std::span<const double> as_span(const Eigen::Ref<const Eigen::VectorXd>& x) {
  return {x.data(), static_cast<std::size_t>(x.size())};
}

/// Columns of x but the intercept, centred by their weighted means, times √w, to unit length (a constant stays zero).
/// Fills centre and length of `basis`.
Eigen::MatrixXd standardised_columns(const Eigen::Ref<const Eigen::MatrixXd>& x,
                                     const Eigen::Ref<const Eigen::VectorXd>& weights, Basis& basis) {
  const Eigen::Index k = x.cols() - 1;
  Eigen::MatrixXd columns = x.rightCols(k);
  basis.centre.resize(k);
  basis.length = Eigen::VectorXd::Ones(k);
  for (Eigen::Index j = 0; j < k; ++j) {
    auto column = columns.col(j);
    basis.centre[j] = base::weighted_mean(as_span(column), as_span(weights));
    column.array() -= basis.centre[j];
    if (weights.size() > 0) column.array() *= weights.array().sqrt();
    const double length = column.stableNorm();
    if (length > 0.0) column /= basis.length[j] = length;
  }
  return columns;
}

std::string why_untestable(const Subject& subject) {
  const Eigen::Index n = subject.residuals.size();
  if (!subject.x.allFinite() || !subject.fitted.allFinite() || !subject.residuals.allFinite())
    return "the fit is not finite";
  if (n <= subject.x.cols()) return "as many coefficients as rows: no residuals are left to test";
  const double largest = (subject.fitted + subject.residuals).lpNorm<Eigen::Infinity>();
  const double spread = std::sqrt(subject.residuals.squaredNorm() / static_cast<double>(n));
  if (!(spread > kRoundingShare * largest)) return "the fit is exact: what is left of the residuals is rounding";
  return {};
}

}  // namespace

Basis centred_basis(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& weights) {
  const Eigen::Index n = x.rows();
  const Eigen::Index k = x.cols() - 1;
  if (n <= k || !x.allFinite()) return {};
  Basis basis;
  basis.q.resize(n, k + 1);
  basis.q.col(0).setOnes();
  if (weights.size() > 0) basis.q.col(0) = weights.cwiseSqrt();
  basis.intercept_length = basis.q.col(0).norm();
  basis.q.col(0) /= basis.intercept_length;
  basis.full_rank = true;
  if (k == 0) return basis;
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(standardised_columns(x, weights, basis));
  basis.q.rightCols(k) = qr.householderQ() * Eigen::MatrixXd::Identity(n, k);
  basis.r = qr.matrixQR().topRows(k).triangularView<Eigen::Upper>();
  const Eigen::VectorXd pivots = basis.r.diagonal().cwiseAbs();
  basis.full_rank =
      pivots.minCoeff() > static_cast<double>(n) * std::numeric_limits<double>::epsilon() * pivots.maxCoeff();
  return basis;
}

Workings prepare(const Subject& subject) {
  const Eigen::VectorXd none(0);
  Workings workings{subject, subject.x.rows(), subject.x.cols(), why_untestable(subject), {}, {}, {}, {}};
  workings.root_weights = Eigen::VectorXd::Ones(workings.n);
  if (workings.weighted()) workings.root_weights = subject.weights.cwiseSqrt();
  workings.residuals = workings.root_weights.cwiseProduct(subject.residuals);
  workings.plain = centred_basis(subject.x, none);
  if (workings.weighted()) workings.whitened = centred_basis(subject.x, subject.weights);
  return workings;
}

Eigen::VectorXd slopes_of(const Workings& workings) {
  const Basis& basis = workings.of_the_fit();
  const Eigen::Index k = workings.p - 1;
  const Eigen::VectorXd whitened = workings.root_weights.cwiseProduct(centred(workings.subject.fitted));
  const Eigen::VectorXd along = basis.q.rightCols(k).transpose() * whitened;
  return basis.r.triangularView<Eigen::Upper>().solve(along).cwiseQuotient(basis.length);
}

TermColumns columns_of(const Workings& workings, std::size_t term) {
  const auto& first = workings.subject.term_first;
  const auto end = term + 1 < first.size() ? static_cast<Eigen::Index>(first[term + 1]) : workings.p;
  return {static_cast<Eigen::Index>(first[term]), end};
}

std::size_t n_terms(const Workings& workings) { return workings.subject.term_first.size(); }

std::string term_name(const Workings& workings, std::size_t term) {
  const auto& names = workings.subject.term_names;
  return term < names.size() ? names[term] : "term " + std::to_string(term + 1);
}

Eigen::VectorXd term_curve(const Workings& workings, const Eigen::VectorXd& slopes, std::size_t term) {
  const TermColumns columns = columns_of(workings, term);
  const auto& x = workings.subject.x;
  if (columns.count() == 1) return x.col(columns.first);
  Eigen::VectorXd curve = Eigen::VectorXd::Zero(workings.n);
  for (Eigen::Index j = columns.first; j < columns.end; ++j)
    curve += slopes[j - 1] * (x.col(j).array() - workings.of_the_fit().centre[j - 1]).matrix();
  return curve;
}

Check named(const char* name, const char* method, const char* hypothesis) {
  Check check;
  check.name = name;
  check.method = method;
  check.hypothesis = hypothesis;
  return check;
}

void note_weights(const Workings& workings, Check& check) {
  if (!workings.weighted()) return;
  if (!check.note.empty()) check.note += "; ";
  check.note += "residuals are multiplied by √weight";
}

Eigen::VectorXd centred(const Eigen::Ref<const Eigen::VectorXd>& x) { return x.array() - base::mean(as_span(x)); }

}  // namespace formsieve::checks

#include "fit/m_estimate.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>

namespace formsieve::fit {

namespace {

using Eigen::Index;

/// Nothing moves any more, in residual scales.
constexpr double kStill = 1e-10;

double square(double x) { return x * x; }

/// Largest move of a row's fitted value is at most √p times that of its coordinates; the coordinates are enough.
bool still(const Eigen::VectorXd& step, double scale) { return step.lpNorm<Eigen::Infinity>() <= kStill * scale; }

double total_rho(const Eigen::VectorXd& r, double scale) {
  double total = 0.0;
  for (const double one : r) total += kEfficient.rho(one / scale);
  return total;
}

/// δ + (U'ψ′U)⁻¹ U'ψ·scale; unset where the matrix is not positive definite.
std::optional<Eigen::VectorXd> newton_step(const Rows& rows, const Eigen::VectorXd& r, double scale) {
  Eigen::VectorXd slope(rows.n());
  Eigen::VectorXd pull(rows.n());
  for (Index i = 0; i < rows.n(); ++i) {
    slope[i] = kEfficient.derivative(r[i] / scale);
    pull[i] = r[i] * kEfficient.weight(r[i] / scale);
  }
  const Eigen::LLT<Eigen::MatrixXd> factor(weighted_gram(rows.u, slope));
  if (factor.info() != Eigen::Success) return std::nullopt;
  return factor.solve(rows.u.transpose() * pull);
}

}  // namespace

double Bisquare::rho(double u) const {
  const double t = square(u / c);
  return t >= 1.0 ? 1.0 : t * (3.0 - t * (3.0 - t));
}
double Bisquare::weight(double u) const {
  const double t = square(u / c);
  return t >= 1.0 ? 0.0 : square(1.0 - t);
}
double Bisquare::derivative(double u) const {
  const double t = square(u / c);
  return t >= 1.0 ? 0.0 : (1.0 - t) * (1.0 - 5.0 * t);
}

double huber_weight(double u) { return std::abs(u) <= kHuber ? 1.0 : kHuber / std::abs(u); }

Eigen::MatrixXd weighted_gram(const Eigen::Ref<const Eigen::MatrixXd>& u, const Eigen::Ref<const Eigen::VectorXd>& d) {
  constexpr Index kChunk = 512;  // a chunk of ten columns stays in the first cache
  const Index p = u.cols();
  Eigen::MatrixXd gram = Eigen::MatrixXd::Zero(p, p);
  Eigen::VectorXd scaled(kChunk);
  for (Index first = 0; first < u.rows(); first += kChunk) {
    const Index count = std::min(kChunk, u.rows() - first);
    for (Index j = 0; j < p; ++j) {
      scaled.head(count) = u.col(j).segment(first, count).cwiseProduct(d.segment(first, count));
      for (Index k = 0; k <= j; ++k) gram(j, k) += scaled.head(count).dot(u.col(k).segment(first, count));
    }
  }
  gram.triangularView<Eigen::StrictlyUpper>() = gram.transpose();
  return gram;
}

std::optional<Eigen::VectorXd> reweighted(const Rows& rows, const Eigen::VectorXd& w) {
  constexpr double kSmallestPivot = 1e-10;  // of the largest: the rows that keep weight do not span the design
  const Eigen::LDLT<Eigen::MatrixXd> factor(weighted_gram(rows.u, w));
  const Eigen::VectorXd pivots = factor.vectorD();
  if (!(pivots.minCoeff() > kSmallestPivot * pivots.maxCoeff())) return std::nullopt;
  return factor.solve(rows.u.transpose() * w.cwiseProduct(rows.e));
}

double median_scale(const Eigen::Ref<const Eigen::VectorXd>& r) {
  Eigen::VectorXd sizes = r.cwiseAbs();
  const auto middle = sizes.begin() + sizes.size() / 2;
  std::nth_element(sizes.begin(), middle, sizes.end());
  double median = *middle;
  if (sizes.size() % 2 == 0) median = 0.5 * (median + *std::max_element(sizes.begin(), middle));
  return median / kNormalMedian;
}

double m_scale(const Eigen::Ref<const Eigen::VectorXd>& r, Index p, double start) {
  constexpr int kMostSteps = 200;
  constexpr double kDone = 1e-12;
  const double wanted = 0.5 * static_cast<double>(r.size() - p);
  double scale = start;
  for (int step = 0; step < kMostSteps; ++step) {
    double total = 0.0;
    for (const double one : r) total += kHalfBreakdown.rho(one / scale);
    const double next = scale * std::sqrt(total / wanted);
    const bool done = std::abs(next - scale) <= kDone * scale;
    scale = next;
    if (done || !(scale > 0.0)) break;
  }
  return scale;
}

std::optional<Eigen::VectorXd> bisquare_estimate(const Rows& rows, double scale, Eigen::VectorXd delta) {
  constexpr int kMostSteps = 200;
  Eigen::VectorXd r = rows.e - rows.u * delta;
  double reached = total_rho(r, scale);
  for (int step = 0; step < kMostSteps; ++step) {
    if (const auto newton = newton_step(rows, r, scale)) {
      const Eigen::VectorXd there = rows.e - rows.u * (delta + *newton);
      const double total = total_rho(there, scale);
      if (still(*newton, scale)) return delta + *newton;
      if (total < reached) {
        delta += *newton;
        r = there;
        reached = total;
        continue;
      }
    }
    Eigen::VectorXd w(rows.n());
    for (Index i = 0; i < rows.n(); ++i) w[i] = kEfficient.weight(r[i] / scale);
    const auto next = reweighted(rows, w);
    if (!next) return std::nullopt;
    const bool done = still(*next - delta, scale);
    delta = *next;
    r = rows.e - rows.u * delta;
    reached = total_rho(r, scale);
    if (done) return delta;
  }
  return std::nullopt;
}

std::optional<HuberEstimate> huber_estimate(const Rows& rows) {
  constexpr int kMostSteps = 500;
  Eigen::VectorXd delta = Eigen::VectorXd::Zero(rows.p());
  Eigen::VectorXd r = rows.e;
  for (int step = 0; step < kMostSteps; ++step) {
    const double scale = median_scale(r);
    if (!(scale > 0.0)) return std::nullopt;
    Eigen::VectorXd w(rows.n());
    for (Index i = 0; i < rows.n(); ++i) w[i] = huber_weight(r[i] / scale);
    const auto next = reweighted(rows, w);
    if (!next) return std::nullopt;
    const bool done = still(*next - delta, scale);
    delta = *next;
    r = rows.e - rows.u * delta;
    if (done) return HuberEstimate{delta, median_scale(r)};
  }
  return std::nullopt;
}

}  // namespace formsieve::fit

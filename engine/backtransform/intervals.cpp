#include "backtransform/intervals.hpp"

#include <boost/math/distributions/students_t.hpp>

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::backtransform {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// α(n + 1) may be a whole number that rounding leaves a few ε short of.
constexpr double kWholeRel = 1e-12;

/// One end: the inverse, or what it approaches at and beyond the edges of its domain.
double carried_end(const forms::Form& response, double z) {
  const forms::Interval domain = forms::inverse_domain(response);
  const bool below = z <= domain.lower, above = z >= domain.upper;
  const bool closed = (below && domain.lower_closed) || (above && domain.upper_closed);
  if ((!below && !above) || closed) return forms::inverse(response, z);
  const forms::Interval own = forms::response_domain(response);
  return below == (forms::monotone_sign(response) > 0) ? own.lower : own.upper;
}

}  // namespace

std::size_t upper_rank(std::size_t n, double level) {
  const double spare = (1.0 - level) * static_cast<double>(n + 1);
  return n + 1 - static_cast<std::size_t>(std::floor(spare * (1.0 + kWholeRel) + kWholeRel));
}

double leverage_at(const Eigen::Ref<const Eigen::MatrixXd>& inverse_root, const Eigen::Ref<const Eigen::VectorXd>& x) {
  assert(inverse_root.rows() == x.size());
  return (inverse_root.transpose() * x).squaredNorm();
}

Ends carried(const forms::Form& response, Ends form_scale) {
  const Ends own{carried_end(response, form_scale.lower), carried_end(response, form_scale.upper)};
  return forms::monotone_sign(response) > 0 ? own : Ends{own.upper, own.lower};
}

NormalInterval::NormalInterval(forms::Form response, double sigma, double df, double level)
    : response_(std::move(response)), sigma_(sigma), quantile_(kInfinity) {
  assert(forms::invertible(response_) && level > 0.0 && level < 1.0);
  if (df > 0.0) quantile_ = boost::math::quantile(boost::math::students_t(df), 0.5 * (1.0 + level));
}

Ends NormalInterval::on_form_scale(double eta, double leverage, double weight) const {
  if (!std::isfinite(quantile_)) return {-kInfinity, kInfinity};
  const double reach = quantile_ * sigma_ * std::sqrt(1.0 / weight + leverage);
  return {eta - reach, eta + reach};
}

Ends NormalInterval::in_own_units(double eta, double leverage, double weight) const {
  return carried(response_, on_form_scale(eta, leverage, weight));
}

CrossInterval::CrossInterval(forms::Form response, std::vector<std::vector<double>> residuals, bool weighted,
                             double level)
    : response_(std::move(response)), residuals_(std::move(residuals)), weighted_(weighted) {
  assert(forms::invertible(response_) && level > 0.0 && level < 1.0);
  for (const auto& of_fold : residuals_) n_ += of_fold.size();
  assert(n_ > 0);
  rank_ = upper_rank(n_, level);
  for (const auto& of_fold : residuals_)
    own_rank_.push_back(std::min(of_fold.size(), (rank_ * of_fold.size() + n_ - 1) / n_));
}

/// The rank_-th smallest of offsets[g] + scale·R over all folds. It lies between the smallest and the largest of the
/// folds' own values of about that rank: at most rank_ − 1 values are below every one of them, and at least rank_ are
/// not above the largest, since Σ⌈rank_·m_g/n⌉ ≥ rank_. What lies between is gathered and selected from.
double CrossInterval::upper_distance(std::span<const double> offsets, double scale) const {
  double low = kInfinity, high = -kInfinity;
  for (std::size_t g = 0; g < residuals_.size(); ++g) {
    if (residuals_[g].empty()) continue;
    const double own = offsets[g] + scale * residuals_[g][own_rank_[g] - 1];
    low = std::min(low, own);
    high = std::max(high, own);
  }
  std::size_t below = 0;
  std::vector<double> between;
  for (std::size_t g = 0; g < residuals_.size(); ++g) {
    const auto value = [&](double residual) { return offsets[g] + scale * residual; };
    const auto& held = residuals_[g];
    const auto from = std::partition_point(held.begin(), held.end(), [&](double r) { return value(r) < low; });
    const auto to = std::partition_point(from, held.end(), [&](double r) { return value(r) <= high; });
    below += static_cast<std::size_t>(from - held.begin());
    for (auto r = from; r != to; ++r) between.push_back(value(*r));
  }
  assert(below < rank_ && rank_ - below <= between.size());
  const auto at = between.begin() + static_cast<std::ptrdiff_t>(rank_ - below - 1);
  std::nth_element(between.begin(), at, between.end());
  return *at;
}

Ends CrossInterval::on_form_scale(std::span<const double> fold_predictions, double weight) const {
  assert(fold_predictions.size() == residuals_.size());
  if (rank_ > n_) return {-kInfinity, kInfinity};
  const double scale = weighted_ ? 1.0 / std::sqrt(weight) : 1.0;
  std::vector<double> mirrored(fold_predictions.size());
  std::transform(fold_predictions.begin(), fold_predictions.end(), mirrored.begin(), [](double eta) { return -eta; });
  // The k-th smallest of η − R is, with the sign turned, the k-th largest of −η + R.
  return {-upper_distance(mirrored, scale), upper_distance(fold_predictions, scale)};
}

Ends CrossInterval::in_own_units(std::span<const double> fold_predictions, double weight) const {
  return carried(response_, on_form_scale(fold_predictions, weight));
}

}  // namespace formsieve::backtransform

#include "backtransform/backtransform.hpp"

#include "backtransform/plain_kind.hpp"
#include "backtransform/slices.hpp"
#include "backtransform/vector_mean.hpp"
#include "base/sums.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::backtransform {

namespace {

using forms::Kind;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Where every argument of Yeo–Johnson 0 is this close to 0, exp(z) − 1 summed as exp(η)·Σexp(e) − m would lose digits.
constexpr double kSmallArgument = 0.1;

using Array = Eigen::Map<const Eigen::ArrayXd>;

Array as_array(const std::vector<double>& values) { return {values.data(), static_cast<Eigen::Index>(values.size())}; }

bool is_yeo_johnson_0(const forms::Form& form) {
  return form.kind == Kind::yeo_johnson && form.parameters.front() == 0.0;
}

double power_of_base(Kind kind, double z) { return kind == Kind::log10 ? std::pow(10.0, z) : std::exp(z); }

/// The mean of f(e) over all e, compensated.
template <class Function>
double mean_of(const std::vector<double>& values, Function f) {
  std::vector<double> mapped(values.size());
  std::transform(values.begin(), values.end(), mapped.begin(), f);
  return base::mean(mapped);
}

/// Σ f(e_j) from each j to the end.
template <class Function>
std::vector<double> sums_from(const std::vector<double>& values, Function f) {
  std::vector<double> sums(values.size() + 1, 0.0);
  long double total = 0.0L;
  for (std::size_t j = values.size(); j-- > 0;) {
    total += f(values[j]);
    sums[j] = static_cast<double>(total);
  }
  return sums;
}

double finite_or_nan(double value) { return std::isfinite(value) ? value : kNaN; }

}  // namespace

Smearing::Smearing(forms::Form response, const Eigen::Ref<const Eigen::VectorXd>& residuals,
                   const Eigen::Ref<const Eigen::VectorXd>& weights)
    : response_(std::move(response)),
      plain_{response_.kind, response_.parameters},
      kind_(plain_kind(response_)),
      sign_(response_.reflect ? -1.0 : 1.0),
      offset_(response_.reflect ? *response_.reflect + response_.shift : -response_.shift),
      weighted_(weights.size() != 0),
      residuals_(residuals.begin(), residuals.end()) {
  assert(forms::invertible(response_) && !residuals_.empty());
  for (std::size_t j = 0; weighted_ && j < residuals_.size(); ++j) {
    residuals_[j] *= std::sqrt(weights[static_cast<Eigen::Index>(j)]);
  }
  smallest_ = *std::min_element(residuals_.begin(), residuals_.end());
  set_closed_form();
  set_order();
}

void Smearing::set_closed_form() {
  moments_.first = base::mean(residuals_);
  if (kind_ == Kind::sqrt || kind_ == Kind::cube_root) {
    moments_.second = mean_of(residuals_, [](double e) { return e * e; });
  }
  if (kind_ == Kind::cube_root) moments_.third = mean_of(residuals_, [](double e) { return e * e * e; });
  if (kind_ == Kind::ln || kind_ == Kind::log10) {
    mean_exp_ = mean_of(residuals_, [kind = kind_](double e) { return power_of_base(kind, e); });
  }
  if (kind_ == Kind::asinh) {
    mean_cosh_ = mean_of(residuals_, [](double e) { return std::cosh(e); });
    mean_sinh_ = mean_of(residuals_, [](double e) { return std::sinh(e); });
  }
}

void Smearing::set_order() {
  const bool exponential = kind_ == Kind::ln || kind_ == Kind::log10 || kind_ == Kind::asinh;
  if (kind_ == Kind::identity || kind_ == Kind::cube_root || (exponential && !weighted_)) return;
  const bool by_halves = is_yeo_johnson_0(response_) && !weighted_;
  const bool many = residuals_.size() > kMostResiduals;
  if (!by_halves && !many) return;
  std::sort(residuals_.begin(), residuals_.end());
  if (by_halves) {
    exp_sum_from_ = sums_from(residuals_, [](double e) { return static_cast<long double>(std::exp(e)); });
  } else if (kind_ == Kind::sqrt) {
    sum_from_ = sums_from(residuals_, [](double e) { return static_cast<long double>(e); });
    square_sum_from_ = sums_from(residuals_, [](double e) { return static_cast<long double>(e) * e; });
    return;
  }
  if (many) slices_ = slice_means(residuals_, kMostResiduals);
}

double Smearing::mean(double eta, double weight) const {
  const double root = weighted_ ? 1.0 / std::sqrt(weight) : 1.0;
  return finite_or_nan(offset_ + sign_ * mean_argument(eta, root));
}

double Smearing::naive(double eta) const { return finite_or_nan(forms::inverse(response_, eta)); }

std::optional<double> Smearing::constant_factor() const {
  if (weighted_ || (kind_ != Kind::ln && kind_ != Kind::log10)) return std::nullopt;
  return mean_exp_;
}

/// The mean of u = h(η + e·root), before reflection and shift.
double Smearing::mean_argument(double eta, double root) const {
  const auto& [first, second, third] = moments_;
  switch (kind_) {
    case Kind::identity:
      return eta + first * root;
    case Kind::sqrt:
      return mean_square(eta, root);
    case Kind::cube_root:
      return ((eta + 3.0 * first * root) * eta + 3.0 * second * root * root) * eta + third * root * root * root;
    case Kind::ln:
    case Kind::log10:
      if (!weighted_) return power_of_base(kind_, eta) * mean_exp_;
      break;
    case Kind::asinh:
      if (!weighted_) return std::sinh(eta) * mean_cosh_ + std::cosh(eta) * mean_sinh_;
      break;
    case Kind::yeo_johnson:
      if (!exp_sum_from_.empty() && std::max(-(eta + residuals_.front()), eta + residuals_.back()) > kSmallArgument) {
        return mean_yeo_johnson_0(eta);
      }
      break;
    default:
      break;
  }
  return mean_inverse(eta, root);
}

/// (1/m) Σ max(η + e·root, 0)²
double Smearing::mean_square(double eta, double root) const {
  const auto& [first, second, third] = moments_;
  if (eta + smallest_ * root >= 0.0) return eta * (eta + 2.0 * root * first) + root * root * second;
  const auto m = static_cast<double>(residuals_.size());
  if (sum_from_.empty()) return (as_array(residuals_) * root + eta).max(0.0).square().sum() / m;
  const auto above = std::upper_bound(residuals_.begin(), residuals_.end(), -eta / root);
  if (eta < 0.0) {  // few arguments are left, and their squares would cancel between the sums
    double total = 0.0;
    for (auto e = above; e != residuals_.end(); ++e) total += (eta + *e * root) * (eta + *e * root);
    return total / m;
  }
  const auto j = static_cast<std::size_t>(above - residuals_.begin());
  const double count = m - static_cast<double>(j);
  return (eta * (count * eta + 2.0 * root * sum_from_[j]) + root * root * square_sum_from_[j]) / m;
}

/// exp(z) − 1 for z ≥ 0 and 1 − √(1 − 2z) below (Yeo & Johnson 2000), z = η + e.
double Smearing::mean_yeo_johnson_0(double eta) const {
  const auto from = std::lower_bound(residuals_.begin(), residuals_.end(), -eta);
  const auto j = static_cast<std::size_t>(from - residuals_.begin());
  const auto m = static_cast<double>(residuals_.size());
  const auto below = as_array(residuals_).head(static_cast<Eigen::Index>(j));
  const double upper = std::exp(eta) * exp_sum_from_[j] - (m - static_cast<double>(j));
  const double lower = j == 0 ? 0.0 : (1.0 - (1.0 - 2.0 * (below + eta)).sqrt()).sum();
  return (upper + lower) / m;
}

double Smearing::mean_inverse(double eta, double root) const {
  const std::vector<double>& e = averaged();
  const double smallest = eta + (slices_.empty() ? smallest_ : slices_.front()) * root;
  if (const auto fast = vector_mean(plain_, kind_, as_array(e), eta, root, smallest)) return *fast;
  double total = 0.0;
  for (const double one : e) total += forms::inverse(plain_, eta + one * root);
  return total / static_cast<double>(e.size());
}

}  // namespace formsieve::backtransform

#include "checks/durbin_watson.hpp"

#include "checks/workings.hpp"

#include <boost/math/distributions/normal.hpp>
#include <boost/math/quadrature/exp_sinh.hpp>

#include <algorithm>
#include <cmath>
#include <exception>
#include <numbers>
#include <optional>
#include <utility>
#include <vector>

namespace formsieve::checks {

double durbin_watson(const Eigen::Ref<const Eigen::VectorXd>& residuals) {
  const Eigen::Index n = residuals.size();
  const double largest = residuals.lpNorm<Eigen::Infinity>();
  const Eigen::VectorXd scaled = residuals / largest;
  return (scaled.tail(n - 1) - scaled.head(n - 1)).squaredNorm() / scaled.squaredNorm();
}

double lag_one_autocorrelation(const Eigen::Ref<const Eigen::VectorXd>& residuals) {
  const Eigen::Index n = residuals.size();
  const Eigen::VectorXd deviation = centred(residuals);
  const double total = deviation.squaredNorm();
  return total > 0.0 ? deviation.tail(n - 1).dot(deviation.head(n - 1)) / total : 0.0;
}

/// The first two cumulants of z'Cz for one d.
struct DurbinWatsonDistribution::Spread {
  double mean = 0.0;  ///< tr C
  double sd = 0.0;    ///< √(2 tr C²)
};

namespace {

/// S_tt; beside the diagonal S is −1.
double diagonal_entry(Eigen::Index t, Eigen::Index n, double d) { return (t == 0 || t == n - 1 ? 1.0 : 2.0) - d; }

/// det(I − 2iuC)^{-1/2} through the LDL' factors of T = I − 2iuS and of Q'T⁻¹Q, u in units of 1/sd. Both have a
/// positive definite real part, so every pivot has a positive real part: no pivoting is needed, and the sum of the
/// pivots' angles is the continuous angle of the determinant.
class CharacteristicFunction {
 public:
  CharacteristicFunction(const Eigen::MatrixXd& basis, double d, double sd)
      : basis_rows_(basis.transpose()),
        d_(d),
        sd_(sd),
        p_(static_cast<std::size_t>(basis.cols())),
        y_re_(p_),
        y_im_(p_),
        g_re_(p_ * p_),
        g_im_(p_ * p_) {}

  struct Value {
    double size;       ///< modulus, falling in u
    double imaginary;  ///< modulus times the sine of the angle
  };
  Value operator()(double u) {
    log_size_ = angle_ = 0.0;
    for (auto* values : {&y_re_, &y_im_, &g_re_, &g_im_}) std::fill(values->begin(), values->end(), 0.0);
    sweep_band(2.0 * u / sd_);
    factor_rest();
    const double size = std::exp(-0.5 * log_size_);
    return {size, size * std::sin(-0.5 * angle_)};
  }

 private:
  /// Forward substitution L y = Q row by row, G += y y'/pivot.
  void sweep_band(double v) {
    const Eigen::Index n = basis_rows_.cols();
    double inverse_re = 0.0, inverse_im = 0.0;  // 1/pivot of the row before
    for (Eigen::Index t = 0; t < n; ++t) {
      double pivot_re = 1.0;
      double pivot_im = -v * diagonal_entry(t, n, d_);
      double l_re = 0.0, l_im = 0.0;
      if (t > 0) {
        l_re = -v * inverse_im;  // the entry beside the diagonal is −iv·(−1) = iv
        l_im = v * inverse_re;
        pivot_re += v * l_im;
        pivot_im -= v * l_re;
      }
      const double size2 = pivot_re * pivot_re + pivot_im * pivot_im;
      inverse_re = pivot_re / size2;
      inverse_im = -pivot_im / size2;
      add_pivot(pivot_re, pivot_im);
      substitute_row(basis_rows_.col(t).data(), l_re, l_im);
      add_outer_product(inverse_re, inverse_im);
    }
  }

  void add_pivot(double re, double im) {
    log_size_ += 0.5 * std::log(re * re + im * im);
    angle_ += std::atan2(im, re);
  }

  void substitute_row(const double* row, double l_re, double l_im) {
    for (std::size_t a = 0; a < p_; ++a) {
      const double re = row[a] - (l_re * y_re_[a] - l_im * y_im_[a]);
      y_im_[a] = -(l_re * y_im_[a] + l_im * y_re_[a]);
      y_re_[a] = re;
    }
  }

  void add_outer_product(double inverse_re, double inverse_im) {
    for (std::size_t a = 0; a < p_; ++a) {
      const double z_re = y_re_[a] * inverse_re - y_im_[a] * inverse_im;
      const double z_im = y_re_[a] * inverse_im + y_im_[a] * inverse_re;
      double* row_re = &g_re_[a * p_];
      double* row_im = &g_im_[a * p_];
      for (std::size_t b = 0; b <= a; ++b) {
        row_re[b] += z_re * y_re_[b] - z_im * y_im_[b];
        row_im[b] += z_re * y_im_[b] + z_im * y_re_[b];
      }
    }
  }

  /// LDL' of the complex symmetric G (lower triangle), in place.
  void factor_rest() {
    for (std::size_t j = 0; j < p_; ++j) {
      const double re = g_re_[j * p_ + j];
      const double im = g_im_[j * p_ + j];
      add_pivot(re, im);
      const double size2 = re * re + im * im;
      for (std::size_t a = j + 1; a < p_; ++a) {
        const double c_re = g_re_[a * p_ + j];
        const double c_im = g_im_[a * p_ + j];
        const double l_re = (c_re * re + c_im * im) / size2;
        const double l_im = (c_im * re - c_re * im) / size2;
        for (std::size_t b = j + 1; b <= a; ++b) {
          const double d_re = g_re_[b * p_ + j];
          const double d_im = g_im_[b * p_ + j];
          g_re_[a * p_ + b] -= l_re * d_re - l_im * d_im;
          g_im_[a * p_ + b] -= l_re * d_im + l_im * d_re;
        }
      }
    }
  }

  Eigen::MatrixXd basis_rows_;  ///< [p × n]
  double d_, sd_;
  std::size_t p_;
  std::vector<double> y_re_, y_im_, g_re_, g_im_;
  double log_size_ = 0.0, angle_ = 0.0;
};

/// P(Q < 0) by the midpoint rule (Davies 1973): Q has mean `mean` and standard deviation 1. The rule's error is at most
/// P(|Q| > 2π/step); Laurent & Massart 2000 bound that tail by e^{-x} at a distance √(2x) + 2·largest·x from the mean,
/// `largest` the largest |eigenvalue|. Unset when the function has not died away after kMostPoints, as with few degrees
/// of freedom.
std::optional<double> by_midpoints(CharacteristicFunction& characteristic, double mean, double largest) {
  constexpr double kTail = 23.0;  // e^{-23} = 1e-10
  constexpr double kDiedAway = 1e-11;
  constexpr int kMostPoints = 200;
  const double step = 2.0 * std::numbers::pi / (mean + std::sqrt(2.0 * kTail) + 2.0 * largest * kTail);
  double total = 0.0;
  for (int k = 0; k < kMostPoints; ++k) {
    const double point = static_cast<double>(k) + 0.5;
    const auto value = characteristic(point * step);
    total += value.imaginary / point;
    if (value.size < kDiedAway) return 0.5 - total / std::numbers::pi;
  }
  return std::nullopt;
}

/// The same by a rule that also takes integrands that fall as slowly as u⁻². Unset when it does not converge.
std::optional<double> by_double_exponential(CharacteristicFunction& characteristic) {
  constexpr double kTolerance = 1e-9;
  constexpr double kNothingLeft = 1e25;  // the integrand falls at least as u⁻²
  const auto integrand = [&](double u) { return u > kNothingLeft ? 0.0 : characteristic(u).imaginary / u; };
  try {
    const double integral = boost::math::quadrature::exp_sinh<double>().integrate(integrand, kTolerance);
    return 0.5 - integral / std::numbers::pi;
  } catch (const std::exception&) {
    return std::nullopt;
  }
}

}  // namespace

DurbinWatsonDistribution::DurbinWatsonDistribution(Eigen::MatrixXd basis) : basis_(std::move(basis)) {}

DurbinWatsonDistribution::Spread DurbinWatsonDistribution::spread_at(double d) const {
  const Eigen::Index n = basis_.rows();
  Eigen::VectorXd diagonal(n);
  for (Eigen::Index t = 0; t < n; ++t) diagonal[t] = diagonal_entry(t, n, d);
  Eigen::MatrixXd s_basis = diagonal.asDiagonal() * basis_;  // S·Q
  s_basis.topRows(n - 1) -= basis_.bottomRows(n - 1);
  s_basis.bottomRows(n - 1) -= basis_.topRows(n - 1);
  const Eigen::MatrixXd inner = basis_.transpose() * s_basis;
  const double trace_of_s2 = diagonal.squaredNorm() + 2.0 * static_cast<double>(n - 1);
  const double trace_of_c2 = trace_of_s2 - 2.0 * s_basis.squaredNorm() + inner.squaredNorm();
  return {diagonal.sum() - inner.trace(), std::sqrt(std::max(2.0 * trace_of_c2, 0.0))};
}

double DurbinWatsonDistribution::lower_tail(double d) const {
  const Spread spread = spread_at(d);
  if (!(spread.sd > 0.0)) return spread.mean < 0.0 ? 1.0 : 0.0;
  const double largest_eigenvalue = std::max(d, 4.0 - d);  // those of A lie in [0, 4)
  CharacteristicFunction characteristic(basis_, d, spread.sd);
  auto p = by_midpoints(characteristic, std::abs(spread.mean) / spread.sd, largest_eigenvalue / spread.sd);
  if (!p) p = by_double_exponential(characteristic);
  return p ? std::clamp(*p, 0.0, 1.0) : lower_tail_by_moments(d);
}

double DurbinWatsonDistribution::lower_tail_by_moments(double d) const {
  const Spread spread = spread_at(d);
  if (!(spread.sd > 0.0)) return spread.mean < 0.0 ? 1.0 : 0.0;
  return boost::math::cdf(boost::math::normal(), -spread.mean / spread.sd);
}

}  // namespace formsieve::checks

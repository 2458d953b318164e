// Prediction intervals of one fit, for rows it has not seen: what they need to know of the fit, and their ends.
#pragma once

#include <formsieve/forms.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::backtransform {

/// Nominal level of every reported interval.
inline constexpr double kIntervalLevel = 0.95;

/// Lower and upper end of an interval.
struct Ends {
  double lower, upper;
};

/// What intervals at new rows need of one fit. p columns of the design with the intercept first, K folds.
struct IntervalBasis {
  Eigen::VectorXd coefficients;                ///< [p] of the fit on all rows
  Eigen::MatrixXd inverse_root;                ///< [p × p] A with A·Aᵀ = (XᵀWX)⁻¹, for leverage_at
  double sigma = 0.0;                          ///< √(rss/df), form's scale; NaN without degrees of freedom
  double df = 0.0;                             ///< n − p
  bool weighted = false;                       ///< whether rows have weights; a new row without one counts as w = 1
  Eigen::MatrixXd fold_coefficients;           ///< [p × K] column g: fit without the rows of fold g (first repeat)
  std::vector<std::vector<double>> residuals;  ///< [K] |response − prediction| on the form's scale of the rows of fold
                                               ///< g by the fit without them, times √w where weighted; rising
};

/// Leverage of a row x [p], intercept included: xᵀ(XᵀWX)⁻¹x = ‖Aᵀx‖². Cost O(p²).
double leverage_at(const Eigen::Ref<const Eigen::MatrixXd>& inverse_root, const Eigen::Ref<const Eigen::VectorXd>& x);

/// Ends on the form's scale carried through the inverse of `response`: a falling form swaps them. An end beyond an edge
/// of the inverse's domain becomes the value that the inverse approaches there, which may be infinite (1/η for an
/// interval that reaches η ≤ 0). NaN where an end is NaN.
Ends carried(const forms::Form& response, Ends form_scale);

/// Normal-theory prediction interval of a new row of weight w at leverage h:
///
///     η ± t(df, (1 + level)/2) · σ·√(1/w + h)
///
/// on the form's scale, carried through the inverse. Exact where the residuals are normal with variance σ²/w.
class NormalInterval {
 public:
  /// `response` is invertible. Without degrees of freedom (df ≤ 0) the interval is the whole line.
  NormalInterval(forms::Form response, double sigma, double df, double level = kIntervalLevel);

  Ends on_form_scale(double eta, double leverage, double weight = 1.0) const;
  Ends in_own_units(double eta, double leverage, double weight = 1.0) const;
  double quantile() const { return quantile_; }  ///< of Student's t; +infinity without degrees of freedom

 private:
  forms::Form response_;
  double sigma_, quantile_;
};

/// ⌈(1 − α)(n + 1)⌉ = n + 1 − ⌊α(n + 1)⌋: which of n values ends a CV+ interval of this level; above n for none.
std::size_t upper_rank(std::size_t n, double level);

/// Distribution-free CV+ interval (Barber, Candès, Ramdas & Tibshirani 2021, section on CV+). With η_g the prediction
/// of the new row by the fit without fold g, R_i the absolute held-out residual of training row i of fold g(i), n the
/// number of them and α = 1 − level:
///
///     lower end: the ⌊α(n + 1)⌋-th smallest of η_g(i) − R_i,    upper: the ⌈(1 − α)(n + 1)⌉-th smallest of η_g(i) +
///     R_i
///
/// −infinity and +infinity where there is no such value (n < 1/α − 1). The theorem guarantees 1 − 2α less a term of
/// order K/n; 1 − α is what is met in practice. With weights R_i is |residual|·√w_i and counts as R_i/√w for a new row
/// of weight w.
class CrossInterval {
 public:
  /// `residuals` [K] rising, at least one in all. `response` is invertible.
  CrossInterval(forms::Form response, std::vector<std::vector<double>> residuals, bool weighted,
                double level = kIntervalLevel);

  /// `fold_predictions` [K]: η_g. Cost O(K log n) and the residuals that lie between the folds' own quantiles.
  Ends on_form_scale(std::span<const double> fold_predictions, double weight = 1.0) const;
  Ends in_own_units(std::span<const double> fold_predictions, double weight = 1.0) const;
  std::size_t n_residuals() const { return n_; }

 private:
  double upper_distance(std::span<const double> offsets, double scale) const;

  forms::Form response_;
  std::vector<std::vector<double>> residuals_;  ///< folds without rows stay, empty
  bool weighted_;
  std::size_t n_ = 0, rank_ = 0;       ///< rank_: ⌈(1 − α)(n + 1)⌉, above n when there is no such value
  std::vector<std::size_t> own_rank_;  ///< [K] where rank_/n falls in each fold
};

}  // namespace formsieve::backtransform

// The ways back to the mean in own units, one class each with a common shape: set up from a training fit, gives the
// mean at a new row.
#pragma once

#include "backtransform/backtransform.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <memory>
#include <string>
#include <vector>

namespace formsieve::backtransform {

/// What a correction is set up from: one fit of the training rows, on the form's scale. Views; m rows.
struct TrainingFit {
  const forms::Form& response;
  Eigen::Ref<const Eigen::VectorXd> fitted;        ///< [m]
  Eigen::Ref<const Eigen::VectorXd> residuals;     ///< [m] raw
  Eigen::Ref<const Eigen::VectorXd> weights;       ///< [m], or size 0
  Eigen::Ref<const Eigen::VectorXd> measured_own;  ///< [m] the response itself
  double sigma;                                    ///< √(rss/df); NaN without degrees of freedom
  double df;                                       ///< m − coefficients
};

/// d f/dη by central differences with a step of the cube root of ε, where rounding and curvature err alike.
template <class Function>
double slope_of(Function f, double eta) {
  constexpr double kStep = 6e-6;
  const double step = kStep * std::max(1.0, std::abs(eta));
  const double above = eta + step, below = eta - step;
  return (f(above) - f(below)) / (above - below);
}

/// A row to predict.
struct NewRow {
  double eta;             ///< linear predictor
  double leverage = 0.0;  ///< xᵀ(XᵀWX)⁻¹x of the training rows
  double weight = 1.0;
};

/// One way back. Arguments outside the inverse's domain are treated as Smearing does: moved to a closed edge, undefined
/// beyond an open one.
class MeanCorrection {
 public:
  virtual ~MeanCorrection() = default;
  /// Mean in own units; NaN where undefined.
  virtual double mean(const NewRow& row) const = 0;
  /// d mean/dη with everything taken from the training fit held fixed, by central differences; NaN where undefined.
  virtual double slope(const NewRow& row) const;
};

enum class Method {
  none,            ///< h(η): a median, not a mean, when residuals are symmetric
  smearing,        ///< Duan 1983
  normal_theory,   ///< residuals taken as normal: exp(s²/2) for ln (Baskerville 1972; Miller 1984), else quadrature
  unbiased,        ///< exact unbiased for ln: Finney 1941; Bradu & Mundlak 1970
  thirds,          ///< smearing within thirds of the fitted value, for unequal spread (Manning 1998)
  ratio_of_means,  ///< Snowdon 1991
};

/// "none", "smearing", "normal theory", "unbiased (g-function)", "smearing by thirds", "ratio of means".
std::string method_name(Method method);

/// Those that differ for a response form, in the order above: of identity only none and smearing, the g-function of ln
/// alone. The normal theory of ln has a closed form with which quadrature agrees, so that it is listed once.
std::vector<Method> methods_for(const forms::Form& response);

/// Sets one up. Cost O(m), or O(m log m) where residuals or fitted values are sorted.
std::unique_ptr<const MeanCorrection> make_correction(Method method, const TrainingFit& fit);

/// Rows that a third needs for a factor of its own: with fewer its standard error, s/√10 of the mean and more, exceeds
/// what unequal spread usually changes.
inline constexpr Eigen::Index kSmallestThird = 10;

/// Smearing within thirds of the fitted value (Manning 1998). Cut points are the ⌈m/3⌉-th and ⌈2m/3⌉-th smallest fitted
/// value; a row belongs to the first third when its η is at most the first, to the second when at most the second,
/// otherwise to the third. Equal fitted values thus stay together, in the lower third. A third of fewer than
/// kSmallestThird training rows uses the residuals of all.
class ThirdsSmearing final : public MeanCorrection {
 public:
  explicit ThirdsSmearing(const TrainingFit& fit);
  double mean(const NewRow& row) const override;
  double slope(const NewRow& row) const override;

  const std::array<double, 2>& cuts() const { return cuts_; }
  const Smearing& of_third(std::size_t third) const { return thirds_[third]; }
  std::size_t third_of(double eta) const;
  /// All three have residuals of their own.
  bool complete() const { return complete_; }

 private:
  std::array<double, 2> cuts_;
  std::vector<Smearing> thirds_;
  bool complete_ = true;
};

/// The mean written out by thirds, as formula():
///
///     energy_kwh = f · exp(3.21 + …), where f is 1.02 up to a form-scale prediction of 3.2, 1.05 up to 4.1 and 1.11
///     above
std::string formula(const ThirdsSmearing& thirds, const std::string& response_column,
                    const std::string& right_hand_side, int digits = kFormulaDigits);

}  // namespace formsieve::backtransform

// Room backtransform: means in own units. Knows nothing of the search. May call: base, design, forms, results of fit.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/forms.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::backtransform {

/// Residuals that a mean runs over at most, where it has no closed form.
inline constexpr std::size_t kMostResiduals = 1001;

/// Back-transformation of one fit by smearing (Duan 1983), set up from training residuals on the form's scale:
///
///     ŷ(η) = (1/m) Σ_j h(η + e_j),    h the inverse of the response form.
///
/// With weights (variance σ²/w) residuals are standardised: for a row of weight w, the mean over j of
/// h(η + e_j·√(w_j/w)).
///
/// Closed forms: identity η + ē; sqrt and cube-root by the moments of e; without weights also ln and log10,
/// exp(η)·mean exp(e), asinh by the addition theorem, and Yeo–Johnson with λ = 0 in its exponential half. They run over
/// every residual. For sqrt an argument below 0 counts as 0, so the moments are those of the residuals above −η. Every
/// other mean runs over the residuals themselves up to kMostResiduals of them, beyond that over that many of their
/// quantiles: the means of equal slices of the sorted residuals, which keep the mean of all and leave an error of at
/// most ½·max|h″| times the mean variance within a slice.
///
/// An argument beyond a closed edge of the inverse's domain is moved to that edge; beyond an open edge, or where the
/// result is no finite number, the mean is NaN.
class Smearing {
 public:
  /// `response` is invertible; `residuals` [m], m ≥ 1, response − fitted of the training rows; `weights` [m] of the
  /// same rows, positive, or size 0. Cost O(m); O(m log m) where residuals have to be sorted, for more than
  /// kMostResiduals or for Yeo–Johnson 0.
  Smearing(forms::Form response, const Eigen::Ref<const Eigen::VectorXd>& residuals,
           const Eigen::Ref<const Eigen::VectorXd>& weights);

  /// Mean in own units at the linear predictor `eta` for a row of this weight (ignored when fitted without weights);
  /// NaN where undefined. Cost O(1) for the closed forms, otherwise O(min(m, kMostResiduals)).
  double mean(double eta, double weight = 1.0) const;
  double naive(double eta) const;  ///< h(η): no correction; NaN where undefined
  /// ln-like responses without weights: mean of exp(e) (10^e for log10); otherwise unset and the factor depends on the
  /// row.
  std::optional<double> constant_factor() const;

  const forms::Form& response() const { return response_; }
  forms::Kind kind() const { return kind_; }  ///< the plain form that it equals: Box–Cox 0 is ln, power ½ is sqrt
  bool weighted() const { return weighted_; }
  std::size_t n_residuals() const { return residuals_.size(); }
  double smallest_residual() const { return smallest_; }  ///< standardised where weighted
  /// Means of e, e² and e³, standardised where weighted.
  struct Moments {
    double first = 0.0, second = 0.0, third = 0.0;
  };
  const Moments& moments() const { return moments_; }
  /// Means of exp(e) (10^e for log10), cosh(e) and sinh(e), for the forms that need them: at weight 1.
  double mean_exp() const { return mean_exp_; }
  double mean_cosh() const { return mean_cosh_; }
  double mean_sinh() const { return mean_sinh_; }

 private:
  void set_closed_form();
  void set_order();
  double mean_argument(double eta, double root) const;
  double mean_square(double eta, double root) const;
  double mean_yeo_johnson_0(double eta) const;
  double mean_inverse(double eta, double root) const;
  const std::vector<double>& averaged() const { return slices_.empty() ? residuals_ : slices_; }

  forms::Form response_;
  forms::Form plain_;                 ///< the same without reflection and shift: its inverse gives u
  forms::Kind kind_;                  ///< as kind()
  double sign_ = 1.0, offset_ = 0.0;  ///< own units = offset + sign·u
  bool weighted_ = false;
  std::vector<double> residuals_;                   ///< [m] standardised; rising where the form needs their order
  std::vector<double> slices_;                      ///< quantiles that stand for more than kMostResiduals; else empty
  std::vector<double> sum_from_, square_sum_from_;  ///< sqrt, many: Σe and Σe² over residuals_[j] and all above
  std::vector<double> exp_sum_from_;                ///< Yeo–Johnson 0: Σexp(e) likewise
  Moments moments_;
  double smallest_ = 0.0;
  double mean_exp_ = 1.0, mean_cosh_ = 1.0, mean_sinh_ = 0.0;
};

/// Significant digits of a correction in a printed formula: as many as the coefficients beside it have.
inline constexpr int kFormulaDigits = 5;

/// The mean in own units written out around the right-hand side of the equation, "3.21 + 0.84·ln(floor_area)":
///
///     energy_kwh = 1.0314 · exp(3.21 + 0.84·ln(floor_area))
///     energy_kwh = (10.2 + 0.4·√(floor_area))² + 0.0213
///     fill = 101 − 1.0314 · exp(…)
///     volume = mean over the training residuals e of 1/(η + e), where η = …
///
/// With weights, for a row of weight 1.
std::string formula(const Smearing& smearing, const std::string& response_column, const std::string& right_hand_side,
                    int digits = kFormulaDigits);
/// Where the formula holds and what happens to arguments beyond the edges of the inverse's domain, in words: "holds
/// where η, the form-scale prediction, is at least 0.83; below that, arguments η + e below 0 count as 0". Empty where
/// it holds everywhere.
std::string formula_validity(const Smearing& smearing, int digits = kFormulaDigits);

/// A correction judged by held-out rows: bias (mean of predicted − measured) and root mean squared error in own units,
/// unset where a prediction is undefined. `predicted` [repeats · n], `measured` [n].
Correction judged(std::string method, double factor, std::span<const double> predicted,
                  std::span<const double> measured);

/// Mean smeared over mean uncorrected prediction at the linear predictors `eta` [n]; `weights` [n] or size 0. NaN where
/// a prediction is undefined.
double mean_ratio(const Smearing& smearing, const Eigen::Ref<const Eigen::VectorXd>& eta,
                  const Eigen::Ref<const Eigen::VectorXd>& weights);

/// What is reported of one fit on all rows: smearing factor (constant_factor, else mean_ratio on these rows), formula,
/// and the corrections "none" and "smearing" with their factors, whose held-out figures are left for `judged`.
Summary summarise(const Smearing& smearing, const Eigen::Ref<const Eigen::VectorXd>& eta,
                  const Eigen::Ref<const Eigen::VectorXd>& weights, const std::string& response_column,
                  const std::string& right_hand_side);

}  // namespace formsieve::backtransform

// Room backtransform: means in own units. Knows nothing of the search. May call: base, design, forms, results of fit.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/forms.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <optional>
#include <vector>

namespace formsieve::backtransform {

/// Back-transformation of one fit by smearing (Duan 1983), set up from training residuals on the form's scale.
/// With weights (variance σ²/w) residuals are standardised: ŷ_i = mean over j of h(η_i + e_j·√(w_j/w_i)). ln, log10,
/// exp-free and linear cases use closed forms where every argument stays in range; otherwise the mean runs over the
/// residuals themselves up to 1,001 of them, beyond that over 1,001 of their quantiles. An argument beyond a closed
/// edge of the inverse's domain is moved to that edge; beyond an open edge the mean is NaN.
class Smearing {
 public:
  /// `weights` of the training rows, or size 0.
  Smearing(forms::Form response, const Eigen::Ref<const Eigen::VectorXd>& residuals,
           const Eigen::Ref<const Eigen::VectorXd>& weights);

  double mean(double eta, double weight = 1.0) const;  ///< own units; NaN where undefined
  double naive(double eta) const;                      ///< h(η): no correction; NaN where undefined
  /// ln-like responses: mean of exp(e) (10^e for log10); otherwise unset and the factor depends on the row.
  std::optional<double> constant_factor() const;

 private:
  forms::Form response_;
  std::vector<double> residuals_;  ///< standardised, sorted, at most kMostResiduals
  bool weighted_ = false;
  // closed-form moments
  double mean_residual_ = 0.0, mean_square_ = 0.0, mean_exp_ = 1.0;
  double min_residual_ = 0.0, max_residual_ = 0.0;
};

inline constexpr std::size_t kMostResiduals = 1001;

}  // namespace formsieve::backtransform

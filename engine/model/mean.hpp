// The mean in own units by the rule of a kept model.
#pragma once

#include "backtransform/plain_kind.hpp"

#include <formsieve/model.hpp>

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::model {

/// Memory of one worker.
struct MeanWorkspace {
  std::vector<double> arguments, values;
};

/// ŷ(η) = (1/m) Σ_j h(η + e_j/√w), h the inverse of the response form, by closed forms where they exist (those of
/// backtransform::Smearing), otherwise over the residuals kept, at most 1,001. An argument beyond a closed edge of the
/// inverse's domain is moved there; beyond an open edge, or where the result is no finite number, the mean is NaN.
class Mean {
 public:
  Mean(const forms::Form& response, const MeanRule& rule);

  /// `eta` [n], `weights` [n] or size 0 for w = 1, `naive` [n] g⁻¹(η); means to `out` [n]. Cost O(n) for closed forms,
  /// O(n · residuals) otherwise.
  void of(std::span<const double> eta, std::span<const double> weights, std::span<const double> naive,
          MeanWorkspace& work, std::span<double> out) const;

 private:
  double argument_mean(const MeanPart& part, double eta, double root, MeanWorkspace& work) const;
  double averaged(const MeanPart& part, double eta, double root, MeanWorkspace& work) const;
  double averaged_square(const MeanPart& part, double eta, double root) const;
  double one(const MeanPart& part, double eta, double root, double naive, MeanWorkspace& work) const;

  forms::Form plain_;  ///< the response form without reflection and shift
  forms::Kind kind_;   ///< the plain form that it equals
  backtransform::WayBack back_;
  MeanRule rule_;
};

}  // namespace formsieve::model

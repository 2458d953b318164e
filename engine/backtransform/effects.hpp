// What each term of a fit does to the mean in own units, in figures and in words.
#pragma once

#include "backtransform/corrections.hpp"

#include <Eigen/Core>

#include <string>
#include <vector>

namespace formsieve::backtransform {

/// One predictor as it enters, and what was seen of it on the rows in use.
struct EffectTerm {
  std::string column;
  forms::Form form;
  int declared = 0;  ///< +1 rising, −1 falling, 0 undeclared
  double min = 0.0, q1 = 0.0, median = 0.0, q3 = 0.0, max = 0.0;
  std::string most_frequent = {};  ///< level; text columns only
};

/// One fit, as the effects see it. Views, form's scale; p coefficients, the intercept first.
struct EffectSubject {
  const forms::Form& response;
  const std::string& response_column;
  const std::vector<EffectTerm>& terms;  ///< in the order of the coefficients
  Eigen::Ref<const Eigen::VectorXd> coefficients;
  Eigen::Ref<const Eigen::MatrixXd> covariance;  ///< [p × p] classical
  double df;
  const MeanCorrection& correction;  ///< the one in use
};

/// In the order of the terms: one entry a term of numbers, one for each level of a text column but the most frequent.
///
/// Both sides logarithms, of the columns as they are: an elasticity, the change in % of the mean that goes with 10 %
/// more of the predictor, 1.1^β − 1, with the interval of β carried through. Otherwise the mean prediction at the upper
/// quartile of the predictor less that at the lower one (at its largest and smallest value where the quartiles are
/// equal; at each level less that at the most frequent one), the other predictors at their medians or most frequent
/// levels, for a row of weight 1. Its interval is by the delta method: ± t·√(gᵀVg) with g the gradient
/// in the coefficients, V their classical covariance, t of `df` degrees of freedom; the correction is held fixed.
/// Direction: how the term's part of the mean moves over the seen range of the predictor.
std::vector<Effect> effects(const EffectSubject& subject);

/// "rising", "falling", "flat", "rising then falling", …, "changing direction 3 times": how Σ coefficient·column of a
/// form moves over [low, high], in own units of a response of this sign. `coefficients` [n_columns(form)].
std::string direction_words(const forms::Form& form, const Eigen::Ref<const Eigen::VectorXd>& coefficients, double low,
                            double high, int response_sign);

}  // namespace formsieve::backtransform

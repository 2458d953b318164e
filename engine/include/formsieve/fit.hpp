// Room fit, result types: one least-squares fit as reported. May call: base.
#pragma once

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::fit {

/// One coefficient on the response form's scale.
struct Coefficient {
  std::string term;  ///< "intercept" or the label of its column, "ln(floor_area)"
  double value = 0.0;
  double se = 0.0;         ///< classical
  double se_robust = 0.0;  ///< HC3, MacKinnon & White 1985
};

/// Likelihood and criteria in the response's own units (Jacobian included; design.md, "Own-scale likelihood").
struct Likelihood {
  double log_likelihood = 0.0;
  double aic = 0.0, aicc = 0.0, bic = 0.0;  ///< aicc is +infinity when n ≤ q + 1
  std::size_t n_parameters = 0;             ///< q: coefficients with intercept, plus one for the variance
};

}  // namespace formsieve::fit

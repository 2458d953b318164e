// Private to room backtransform: the mean in own units of a response whose residuals are normal.
#pragma once

#include "backtransform/plain_kind.hpp"

namespace formsieve::backtransform {

/// E h(η + σZ/√w), h the inverse of the response form and Z standard normal. Closed for ln, exp(η + σ²/(2w))
/// (Baskerville 1972; Miller 1984), log10 likewise, and sqrt, whose argument stops at 0; otherwise by Gauss–Hermite
/// quadrature. Where a node of weight in the rule lies beyond an open edge of the inverse's domain, within 7.6 σ/√w of
/// η, the mean is NaN.
class NormalMean {
 public:
  NormalMean(const forms::Form& response, double sigma);
  double operator()(double eta, double weight) const;  ///< NaN where undefined

 private:
  double mean_argument(double eta, double sd) const;
  double by_quadrature(double eta, double sd) const;

  forms::Form plain_;
  forms::Kind kind_;
  WayBack back_;
  double sigma_;
};

}  // namespace formsieve::backtransform

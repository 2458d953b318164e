// Private to room backtransform: the series behind the exact unbiased mean of a lognormal response.
#pragma once

namespace formsieve::backtransform {

/// ₀F₁(; b; z) = Σ_k z^k / ((b)_k k!), b > 0: the g-function of Finney 1941 is ₀F₁(; m/2; m²t/(2(m + 1))) with m
/// degrees of freedom. Sums the series until its terms no longer count; for negative z they alternate, so that digits
/// are lost where |z|/b is beyond some tens. +infinity beyond the range of doubles, NaN when z is NaN. Cost
/// O(√|z|) terms at most.
double hypergeometric_0f1(double b, double z);

/// The factor g on exp(η̂) that makes exp(η̂)·g an unbiased estimate of exp(η + σ²/(2w)), when ln y is normal with
/// mean η and variance σ²/w, η̂ is the least-squares prediction with variance h·σ², and s² estimates σ² with m degrees
/// of freedom (Bradu & Mundlak 1970):
///
///     g = ₀F₁(; m/2; (m/4)·(1/w − h)·s²)
///
/// since E (s²)^k = σ^{2k}·(2/m)^k·(m/2)_k, so that E g = exp(σ²(1/w − h)/2). NaN without degrees of freedom, and where
/// g is not positive (a row whose leverage is far beyond 1/w): no mean is.
double unbiased_factor(double df, double sigma, double leverage, double weight);

}  // namespace formsieve::backtransform

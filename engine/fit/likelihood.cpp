#include "fit/least_squares.hpp"

#include <cmath>
#include <limits>
#include <numbers>

namespace formsieve::fit {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

double log_likelihood(double rss, double n, double log_jacobian, double half_log_weights) {
  if (!std::isfinite(log_jacobian)) return -kInfinity;
  if (rss == 0.0) return kInfinity;
  return -0.5 * n * (std::log(2.0 * std::numbers::pi) + std::log(rss / n) + 1.0) + half_log_weights + log_jacobian;
}

}  // namespace

Likelihood own_scale_likelihood(double rss, std::size_t n, std::size_t n_coefficients, double log_jacobian,
                                double half_log_weights) {
  Likelihood likelihood;
  const double l = log_likelihood(rss, static_cast<double>(n), log_jacobian, half_log_weights);
  likelihood.log_likelihood = l;
  likelihood.n_parameters = n_coefficients + 1;
  likelihood.aic = -2.0 * l + aic_penalty(n_coefficients);
  likelihood.bic = -2.0 * l + bic_penalty(n_coefficients, n);
  const double aicc = aicc_penalty(n_coefficients, n);
  likelihood.aicc = std::isinf(aicc) ? aicc : -2.0 * l + aicc;  // never −∞ + ∞
  return likelihood;
}

double aic_penalty(std::size_t n_coefficients) { return 2.0 * static_cast<double>(n_coefficients + 1); }

double aicc_penalty(std::size_t n_coefficients, std::size_t n) {
  const std::size_t q = n_coefficients + 1;
  if (n <= q + 1) return kInfinity;
  const auto parameters = static_cast<double>(q);
  return 2.0 * parameters + 2.0 * parameters * (parameters + 1.0) / static_cast<double>(n - q - 1);
}

double bic_penalty(std::size_t n_coefficients, std::size_t n) {
  return static_cast<double>(n_coefficients + 1) * std::log(static_cast<double>(n));
}

}  // namespace formsieve::fit

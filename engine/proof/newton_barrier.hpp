// The variables of the dual of a node and its objective with the barrier (newton.hpp).
#pragma once

#include "proof/dense_kernel.hpp"
#include "proof/dual.hpp"
#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

/// A point of the dual with the variables that stand for maxima. D is a full matrix, zero outside the predictors'
/// blocks.
struct Variables {
  Eigen::MatrixXd d;
  Eigen::VectorXd g;  ///< [open columns]
  Eigen::VectorXd u;  ///< [open predictors]
  double lambda = 0.0, s = 0.0;

  /// this = point + length · direction.
  void set_along(const Variables& point, double length, const Variables& direction, const Reduced& problem);
};

/// The constraints of λ and s: s ≥ kλ + τ_k at both ends, 0 < λ < `most_lambda`.
struct Prices {
  double k_fewest = 0.0, tau_fewest = 0.0;
  double k_most = 0.0, tau_most = 0.0;
  /// Where every predictor must be in and their number fixes k, λ and u move against each other at no cost; a bound
  /// far above any price of use keeps the centre in reach.
  double most_lambda = 0.0;

  Prices(const Reduced& problem, const ColumnRange& range, double lambda);
  double slack_fewest(const Variables& at) const { return at.s - k_fewest * at.lambda - tau_fewest; }
  double slack_most(const Variables& at) const { return at.s - k_most * at.lambda - tau_most; }
};

/// M − D = LLᵀ and what follows from it.
struct Factor {
  PaddedMatrix lower;          ///< L; above the diagonal anything
  std::vector<Line> residual;  ///< L⁻¹(b − g)
  std::vector<double> work;    ///< anything

  double* residual_data() { return residual.data()->at; }
  const double* residual_data() const { return residual.data()->at; }
};

/// yy − (b − g)ᵀ(M − D)⁻¹(b − g) − Σu − s + μ · (barrier); −infinity outside the domain. Fills in `factor`. Cost: a
/// Cholesky factorisation of order [open columns].
double merit(const Reduced& problem, const Prices& prices, double mu, const Variables& at, Factor& factor);

/// Sets u and s to the maximiser of the merit with all else fixed, by bisection in one variable each. False where some
/// D_ff is not positive definite.
bool centre(const Reduced& problem, const Prices& prices, double mu, Variables& at);

}  // namespace formsieve::proof

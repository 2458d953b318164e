// What several checks need of one fit, made once: whether its residuals can be tested at all, and orthonormal bases of
// its design.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

#include <string>

namespace formsieve::checks {

/// Residuals whose standard deviation is below this share of the largest |response| are rounding, not data: storing the
/// response costs ε/2 = 1e-16 of it, and a backward-stable fit adds some tens of that.
inline constexpr double kRoundingShare = 1e-13;

/// Orthonormal basis of a design, whitened or not. The columns but the intercept are centred by their (weighted) means,
/// multiplied by √w and brought to unit length before the QR, which keeps the digits of columns far from zero.
struct Basis {
  Eigen::MatrixXd q;  ///< [n × p] orthonormal; column 0 is the intercept's direction, √w/‖√w‖
  Eigen::MatrixXd r;  ///< [p−1 × p−1] upper triangular; r'r is the (weighted) correlation matrix of the columns
  bool full_rank = false;  ///< no column is a combination of others, by n·ε·max|r_jj|
};

/// `weights` may have size 0. Cost O(n k²).
Basis centred_basis(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& weights);

struct Workings {
  const Subject& subject;
  Eigen::Index n;                ///< rows
  Eigen::Index p;                ///< design columns with the intercept
  std::string untestable;        ///< why the residuals cannot be tested; empty when they can
  Eigen::VectorXd root_weights;  ///< [n] √w; ones without weights
  Eigen::VectorXd residuals;  ///< [n] residual times √w: of equal variance if the weights are right. What is tested
  Basis plain;                ///< without the weights: spread is regressed on the design as it is
  Basis whitened;             ///< with the weights; empty when there are none (use of_the_fit)

  bool weighted() const { return subject.weights.size() > 0; }
  const Basis& of_the_fit() const { return weighted() ? whitened : plain; }
};

Workings prepare(const Subject& subject);

/// A check with its names filled in that passes until shown otherwise.
Check named(const char* name, const char* method, const char* hypothesis);

/// Adds to the note of a residual check of a weighted fit what was tested.
void note_weights(const Workings& workings, Check& check);

/// x − mean(x).
Eigen::VectorXd centred(const Eigen::Ref<const Eigen::VectorXd>& x);

// One function a check, each in the file of its name.
Check normal_residuals(const Workings& workings);
Check equal_spread(const Workings& workings);
Check equal_spread_by_term(const Workings& workings);
Check straightness(const Workings& workings);
Check separable_terms(const Workings& workings);
Check no_single_row(const Workings& workings);
Check independence(const Workings& workings);

}  // namespace formsieve::checks

// Better blocks D for a given v: block-coordinate ascent.
#pragma once

#include "proof/certified.hpp"
#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

/// One pass over the predictors that raises Σ_j tr(W_jD_j) + μ log det(M − D), W_j the derivative of the bound by D_j
/// at v (averaged over passes): the best D_j for the other blocks fixed is D_j + (A_jj)⁻¹ − μW_j⁻¹, A = (M − D)⁻¹,
/// which is then updated by a matrix of rank q_j. Cost: two Cholesky factorisations, an inverse and 2q³ operations, q
/// all columns.
class BlockSweep {
 public:
  explicit BlockSweep(const Reduced& problem) : problem_(&problem), weight_(problem.open.size()) {}

  enum class Outcome { moved, reconditioned, stuck };
  /// `z` certified for `d` before and after. `stuck`: both are as they were.
  Outcome operator()(const Eigen::VectorXd& v, double lambda, double mu, Eigen::MatrixXd& d, CertifiedDifference& z);

 private:
  Eigen::MatrixXd weight_of(std::size_t predictor, const Eigen::VectorXd& v, double lambda,
                            const class FormScales& scales);
  void move_block(std::size_t predictor, double lambda, double mu, Eigen::MatrixXd& d);

  const Reduced* problem_;
  std::vector<Eigen::MatrixXd> weight_;
  Eigen::MatrixXd inverse_;
};

}  // namespace formsieve::proof

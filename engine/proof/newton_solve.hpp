// Solves the Newton system (newton_system.hpp) by conjugate gradients.
#pragma once

#include "proof/newton_system.hpp"

#include <Eigen/Cholesky>
#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

/// The Hessian without what D̃ of one predictor has to do with D̃ of another: D̃ and u of each predictor are eliminated,
/// and w and λ are solved for exactly. Cost: a Cholesky factorisation of order [open columns] + 1.
class Preconditioner {
 public:
  bool build(const NewtonSystem& system);
  void apply(const NewtonSystem& system, const Eigen::VectorXd& in, Eigen::VectorXd& out);

 private:
  struct Block {
    Eigen::MatrixXd lower;     ///< of the predictor's own D̃ and u
    Eigen::MatrixXd coupling;  ///< L⁻¹ times what D̃ and u have to do with w and λ
  };
  std::vector<Block> blocks_;
  Eigen::MatrixXd core_;  ///< Cholesky factor for w and λ
  Eigen::VectorXd right_;
};

class ConjugateGradients {
 public:
  /// False where a factorisation failed. Stops when more iterations would add little to slopeᵀ solution.
  bool solve(NewtonSystem& system, Eigen::VectorXd& solution);
  int n_iterations() const { return n_iterations_; }

 private:
  Preconditioner preconditioner_;
  Eigen::VectorXd residual_, scaled_, along_, image_;
  int n_iterations_ = 0;
};

}  // namespace formsieve::proof

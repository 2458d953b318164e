// Solves the Newton system (newton_system.hpp) by conjugate gradients.
//
// What couples D̃ of one predictor with D̃ of another is products of two entries of A between them, small beside the
// identity that each has by itself, and everything else can be eliminated: a few iterations do what a factorisation of
// the whole, of five times the order, would do. Every iterate is an ascent direction, and gradientᵀ iterate rises to
// the decrement of the exact step.
#pragma once

#include "proof/newton_system.hpp"

#include <vector>

namespace formsieve::proof {

/// The Hessian without what D̃ of one predictor has to do with D̃ of another: D̃ and u of each predictor are eliminated,
/// and w and λ are solved for exactly. Cost: a Cholesky factorisation of order [open columns] + 1.
class Preconditioner {
 public:
  bool build(NewtonSystem& system);
  void apply(const NewtonSystem& system, const Lines& in, Lines& out);

 private:
  void add_group(const Lanes& lanes, const LaneGroup& group);

  PaddedMatrix core_;  ///< Cholesky factor for w and λ
  Lines right_, rest_;
};

class ConjugateGradients {
 public:
  explicit ConjugateGradients(const NewtonSystem& system);
  /// False where a factorisation failed. Stops when more iterations would add little to gradientᵀ solution.
  bool solve(NewtonSystem& system);
  const Lines& solution() const { return solution_; }
  /// gradientᵀ solution.
  double decrement() const { return decrement_; }
  int n_iterations() const { return n_iterations_; }

 private:
  Preconditioner preconditioner_;
  Lines solution_, residual_, scaled_, along_, image_;
  double decrement_ = 0.0;
  int n_iterations_ = 0;
};

}  // namespace formsieve::proof

// Newton's method on the dual of a node (dual.hpp), with a logarithmic barrier.
//
//     maximise  yy − (b − g)ᵀ(M − D)⁻¹(b − g) − Σ_j u_j − s
//     subject to  M − D ≻ 0;  for every open form f of c_f columns of predictor j
//         D_ff ≻ 0,  u_j + c_f λ ≥ g_fᵀ D_ff⁻¹ g_f   and u_j ≥ 0, where j may be absent,
//         u_j + c_f λ ≥ g_fᵀ D_ff⁻¹ g_f              and u_j free of sign, where j must be in;
//         s ≥ k λ + τ_k at both ends of the range of k, λ > 0
//     (k counts open columns).
// A value ≥ 0 proves the node for the whole range, since τ is convex in k.
#pragma once

#include "proof/dual.hpp"

#include <memory>

namespace formsieve::proof {

class Newton {
 public:
  /// Starts at `start` (d, g, lambda, mu read; M − D and every D_ff must be positive definite, D symmetric); u and s
  /// are set by centring. `problem` must outlive this. `range` counts the fixed columns too, as everywhere. A step
  /// solves the Newton system by conjugate gradients (newton_solve.hpp). Its cost: some factorisations of order [open
  /// columns], and for each iteration 2 · [open columns]² · [columns of a predictor].
  Newton(const Reduced& problem, const ColumnRange& range, const DualPoint& start);
  ~Newton();
  Newton(Newton&&) noexcept;

  struct Step {
    bool usable = false;     ///< false: a factorisation failed or no step length was acceptable; the point is unchanged
    double decrement = 0.0;  ///< Newton decrement over mu
    double length = 0.0;
    int iterations = 0;  ///< of conjugate gradients
  };
  Step step();

  void set_mu(double mu);
  double mu() const;
  /// v = (M − D)⁻¹(b − g) filled in.
  DualPoint point() const;

  /// Variables of the Newton system of a problem: Σ_j (q_j(q_j+1)/2 + q_j + 1) + 2 for q_j open columns each.
  static std::size_t n_variables(const Reduced& problem);

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace formsieve::proof

// Gradient and Hessian of the merit (newton_barrier.hpp) at a point, the Hessian as an operator.
//
// With A = (M − D)⁻¹ and x = A(b − g), for a change (E, e) of (D, g),
//     slope      −xᵀEx + 2xᵀe − μ tr(AE) + (barrier of the forms, u, λ, s)
//     curvature  2(Ex − e)ᵀA(Ex − e) + μ tr(AEAE) + (the same).
// Three changes of variable make that cheap and well scaled:
//   - each predictor in the basis R = chol(A_jj)⁻ᵀ: D = RD̃Rᵀ, g = Rg̃, so that A_jj becomes the identity; forms of one
//     predictor are nearly collinear, and without it the steps drown in rounding;
//   - w = g̃ − D̃x in place of g̃: D̃ and w then meet only inside a predictor;
//   - the entries of D̃ off the diagonal are times √2, so that tr(D̃²) is a plain sum of squares.
// The barrier of a form, ln det B with B = [[D_ff, g_f], [g_fᵀ, u + c_f λ]], has with B⁻¹ = VVᵀ the curvature
// ‖VᵀB′V‖²: c + 1 columns make (c + 1)(c + 2)/2 rows of a Jacobian J, and a predictor's curvature is μJᵀJ.
#pragma once

#include "proof/newton_barrier.hpp"
#include "proof/newton_lanes.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

class NewtonSystem {
 public:
  explicit NewtonSystem(const Reduced& problem);

  /// At a point of the domain with its factor. False where rounding left a block of A that is not positive definite.
  /// Cost: the inverse of a matrix of order [open columns].
  bool build(const Variables& at, const Factor& factor, const Prices& prices, double mu);

  double mu() const { return mu_; }
  /// In the order of Lanes.
  const Lines& gradient() const { return gradient_; }
  /// out = (−Hessian) in, positive definite. Cost: 1.6 · [open columns]² · [columns of a predictor].
  void multiply(const Lines& in, Lines& out);
  /// A direction in the variables of the dual. `direction` must have their sizes, and D zero outside the blocks.
  void expand(const Lines& solution, Variables& direction);

  Lanes& lanes() { return lanes_; }
  const Lanes& lanes() const { return lanes_; }
  /// Curvature of λ and s by their own constraints.
  const Eigen::Matrix2d& price_curvature() const { return price_curvature_; }

 private:
  using Small = Eigen::Map<Eigen::MatrixXd>;
  Small small(std::vector<double>& work, std::size_t order) const;
  bool set_basis(std::size_t j);
  void gather_blocks();
  void add_predictor(std::size_t j, const Variables& at);
  bool factor_form(const OpenForm& form, const Variables& at, double u);
  void add_form(std::size_t j, const OpenForm& form, std::size_t& row);
  void add_row(std::size_t j, std::size_t row, std::size_t k, std::size_t l, double n_columns);
  void add_prices(const Variables& at, const Prices& prices);

  const Reduced* problem_;
  Lanes lanes_;
  PaddedMatrix inverse_, inverse_work_;
  Lines x_;  ///< A(b − g) in the predictors' bases
  Lines gradient_, kernel_work_;
  Eigen::Matrix2d price_curvature_;
  double mu_ = 0.0;
  // of one predictor or form: R or D̃; a product; V; the columns of V in the predictor's basis
  std::vector<double> square_, product_, v_, columns_, z_;
  std::size_t form_order_ = 0;  ///< c + 1 of the form in v_
};

}  // namespace formsieve::proof

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
//
// The order of the variables: for each open predictor D̃ (upper triangle by rows), u, w; then λ and s.
#pragma once

#include "proof/newton_barrier.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

/// What one predictor adds to the Hessian by itself: μJᵀJ, and u's own barrier.
struct PredictorTerms {
  Eigen::Index first = 0, n_columns = 0;  ///< its columns in the reduced matrix
  Eigen::Index offset = 0;                ///< of its variables
  Eigen::Index n_entries = 0;             ///< of D̃: n_columns (n_columns + 1) / 2
  Eigen::MatrixXd basis;                  ///< R
  Eigen::MatrixXd jacobian;               ///< J by D̃, u and w
  Eigen::VectorXd by_lambda;              ///< J by λ
  double u_curvature = 0.0;               ///< μ / u², or 0 where the predictor must be in

  Eigen::Index n_variables() const { return n_entries + 1 + n_columns; }
  Eigen::Index u() const { return offset + n_entries; }
  Eigen::Index w() const { return offset + n_entries + 1; }
};

class NewtonSystem {
 public:
  explicit NewtonSystem(const Reduced& problem);

  /// At a point of the domain with its factor. False where rounding left a block of A that is not positive definite.
  /// Cost: the inverse of a matrix of order [open columns].
  bool build(const Variables& at, const Factor& factor, const Prices& prices, double mu);

  Eigen::Index n_variables() const { return gradient_.size(); }
  double mu() const { return mu_; }
  const Eigen::VectorXd& gradient() const { return gradient_; }
  /// out = (−Hessian) in, positive definite. Cost: 2 · [open columns]² · [columns of a predictor].
  void multiply(const Eigen::VectorXd& in, Eigen::VectorXd& out);
  /// A direction in the variables of the dual.
  void expand(const Eigen::VectorXd& solution, Variables& direction) const;

  const std::vector<PredictorTerms>& predictors() const { return terms_; }
  const Eigen::MatrixXd& inverse() const { return a_; }  ///< A in the predictors' bases
  const Eigen::Matrix2d& price_curvature() const { return price_curvature_; }

 private:
  bool change_basis(const Variables& at, const Factor& factor);
  void add_main_slope(const PredictorTerms& terms);
  void add_predictor(std::size_t j, const Variables& at);
  void add_form(const OpenForm& form, const Variables& at, double u, PredictorTerms& terms, Eigen::Index& row);
  void add_prices(const Variables& at, const Prices& prices);

  const Reduced* problem_;
  std::vector<PredictorTerms> terms_;
  Eigen::MatrixXd a_, product_;
  Eigen::VectorXd x_;  ///< A(b − g) in the predictors' bases
  Eigen::VectorXd gradient_, w_, image_;
  Eigen::Matrix2d price_curvature_;  ///< of λ and s, by their own constraints
  double mu_ = 0.0;
};

/// The symmetric matrix of its upper triangle by rows with √2 off the diagonal.
void unpack(const double* entries, Eigen::Ref<Eigen::MatrixXd> matrix);

}  // namespace formsieve::proof

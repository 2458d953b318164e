// The forms of a node measured by D: lengths of coefficients, and what a form costs.
#pragma once

#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::proof {

/// Lower Cholesky factors of the diagonal blocks D_ff. |Lᵀv_f| is the length of a form's coefficients: the term of the
/// relaxation is ψ(Σ_f |L_fᵀv_f|) with ψ(s) = 2√(cλ) s up to √(cλ) and s² + cλ beyond, for forms of c columns (their
/// perspective); where D_ff is not positive definite a small multiple of the identity stands in, since any v is valid.
class FormScales {
 public:
  FormScales(const Reduced& problem, const Eigen::MatrixXd& d);

  double length(std::size_t predictor, std::size_t form, const Eigen::VectorXd& v) const;
  /// Of all forms of a predictor.
  double total_length(std::size_t predictor, const Eigen::VectorXd& v) const;
  const Eigen::MatrixXd& lower(std::size_t predictor, std::size_t form) const { return lower_[predictor][form]; }
  double single(Eigen::Index column) const { return single_(column); }

 private:
  const Reduced* problem_;
  std::vector<std::vector<Eigen::MatrixXd>> lower_;  ///< empty matrices for forms of one column
  Eigen::VectorXd single_;                           ///< [columns] √d of forms of one column
};

}  // namespace formsieve::proof

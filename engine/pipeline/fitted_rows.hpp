// One candidate's rows as the ways back to own units see them, and the training parts of its folds.
#pragma once

#include "design/design.hpp"
#include "fit/folded_fit.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::pipeline {

/// Design, response and folds of one candidate on the rows in use. Views.
struct FittedRows {
  const forms::Form& response;
  const Eigen::MatrixXd& x;              ///< [n × p], intercept first
  const Eigen::VectorXd& z;              ///< [n] response on the form's scale
  const Eigen::VectorXd& weights;        ///< [n], or size 0
  std::span<const double> measured_own;  ///< [n]
  const design::Folds& folds;

  double weight(Eigen::Index row) const { return weights.size() > 0 ? weights[row] : 1.0; }
};

/// A fit without one fold: what it learned from and how it predicts the rows left out.
struct TrainingPart {
  Eigen::VectorXd fitted, residuals, weights, measured_own;  ///< [m] of the training rows; weights may be empty
  double sigma = 0.0;                                        ///< NaN without degrees of freedom
  double df = 0.0;
  std::vector<Eigen::Index> held_out;  ///< rows left out, rising
  Eigen::VectorXd eta;                 ///< [held_out] their predictions on the form's scale
  Eigen::VectorXd leverage;            ///< [held_out] xᵀ(XᵀWX)⁻¹x
};

/// Errors as FoldedFit::without. Cost O(n p + held-out rows · p²).
Result<TrainingPart> training_part(const FittedRows& rows, std::span<const std::uint32_t> fold_of,
                                   const fit::FoldedFit& folded, std::size_t fold);

}  // namespace formsieve::pipeline

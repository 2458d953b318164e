// A node of the proof as a problem of its own: what is decided is projected out, the rest is open.
#pragma once

#include "proof/problem.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::proof {

/// One form that is still open: its columns in the reduced matrix.
struct OpenForm {
  std::size_t form = 0;  ///< index in the predictor's menu
  Eigen::Index first = 0;
  Eigen::Index n_columns = 1;
  bool separable = true;  ///< false: every candidate with it and the fixed columns has too small a pivot
};

/// A predictor with more than one action left.
struct OpenPredictor {
  std::size_t predictor = 0;
  bool must = false;  ///< absence is no longer an action
  Eigen::Index first = 0;
  Eigen::Index n_columns = 0;  ///< of all its open forms, side by side
  std::vector<OpenForm> forms;
};

/// The action of an open predictor: its open forms in order, then absence.
inline Actions bit_of(const OpenPredictor& predictor, std::size_t action) {
  return action == predictor.forms.size() ? Actions{1} : Actions{2} << predictor.forms[action].form;
}

/// The open columns after the fixed ones were eliminated. With c the coefficients of the open columns,
///     RSS_rel = yy − 2 bᵀc + cᵀMc.
/// Always built from the root by one Cholesky factorisation of the fixed columns: errors do not grow with depth.
struct Reduced {
  std::size_t response = 0;
  std::size_t fixed_columns = 0, fixed_terms = 0;
  std::vector<std::uint16_t> fixed;  ///< [n_predictors] choices of the decided predictors, 0 for the open ones
  std::vector<OpenPredictor> open;
  Eigen::MatrixXd m;  ///< [open columns]²
  Eigen::VectorXd b;
  double yy = 1.0;
  /// Bound on the error of an entry of M and b from rounding in the elimination: a multiple of the unit roundoff over
  /// the smallest pivot of the fixed block.
  double entry_error = 0.0;
  bool separable = true;  ///< false when a fixed column's pivot is not above search::kSmallestPivot_rel
};

Reduced reduce(const RootGram& root, std::size_t response, std::span<const Actions> actions);

}  // namespace formsieve::proof

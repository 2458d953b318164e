// Least squares on every "all folds but one" from one pass over the rows.
#pragma once

#include <formsieve/base.hpp>

#include "fit/standard_columns.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <vector>

namespace formsieve::fit {

/// Coefficients and weighted residual sum of squares of one least-squares solution.
struct Solution {
  Eigen::VectorXd coefficients;  ///< [p], in the units of the columns given
  double rss = 0.0;              ///< weighted
};

/// Mathematics: with the √w-whitened rows of fold g factored as [X_g y_g] = Q_g T_g, the least-squares problem over any
/// set of folds has the same solution as the stacked triangles T_g of those folds (Golub & Van Loan, Matrix
/// Computations, chapter on modifying matrix factorisations; from memory). The triangles of all folds before and of all
/// folds after each one are kept, so that leaving one out joins two triangles: K training fits cost one pass over the
/// rows, O(n p²), and O(K p³), all by orthogonal transformations.
class FoldedFit {
 public:
  /// x: [n × p] with the intercept as column 0; y: [n]; weights: [n] positive, or size 0; fold_of: [n], below n_folds.
  FoldedFit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
            const Eigen::Ref<const Eigen::VectorXd>& weights, std::span<const std::uint32_t> fold_of,
            std::size_t n_folds);

  /// Fit on all rows but those of one fold. Errors (kind data) and decision of rank as in quick_fit.
  Result<Solution> without(std::size_t fold) const;
  /// Fit on all rows.
  Result<Solution> all() const;
  /// [n_folds] Entry g: fit on all rows but those of `fold` and of fold g; entry `fold` is without(fold). An error when
  /// one of them has none. Cost O(K p³).
  Result<std::vector<Solution>> without_each_beside(std::size_t fold) const;

  /// [p × p] A with A·Aᵀ = (XᵀWX)⁻¹ of all rows but those of one fold, so that a row x has leverage ‖Aᵀx‖² there. Where
  /// without(fold) is an error, so is this.
  Result<Eigen::MatrixXd> inverse_root_without(std::size_t fold) const;
  Result<Eigen::MatrixXd> inverse_root_of_all() const;

 private:
  Result<Solution> solve(const Eigen::MatrixXd& triangle, Eigen::Index n_rows) const;
  Result<Eigen::MatrixXd> inverse_root(const Eigen::MatrixXd& triangle, Eigen::Index n_rows) const;

  std::optional<Error> refused_;  ///< why there is nothing to solve
  std::vector<Standard> standards_;
  std::vector<Eigen::MatrixXd> of_fold_;  ///< [n_folds] triangles of single folds
  std::vector<Eigen::MatrixXd> before_, after_;  ///< [n_folds + 1] triangles of folds 0 … g − 1, and of g … n_folds − 1
  std::vector<Eigen::Index> rows_;               ///< [n_folds] rows in each fold
  Eigen::Index n_rows_ = 0;
};

}  // namespace formsieve::fit

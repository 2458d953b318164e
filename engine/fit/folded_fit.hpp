// Least squares on every "all folds but one" from one QR factorisation a fold.
#pragma once

#include <formsieve/base.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::fit {

/// Coefficients and weighted residual sum of squares of one least-squares solution.
struct Solution {
  Eigen::VectorXd coefficients;  ///< [p], in the columns given
  double rss = 0.0;              ///< weighted
};

/// Mathematics: with √w-whitened rows of fold g factored as [X_g y_g] = Q_g [R_g s_g], the least-squares problem over
/// any set of folds has the same solution as the stacked triangles R_g, s_g of those folds (Golub & Van Loan, Matrix
/// Computations, section on QR by blocks of rows). So K training fits cost one pass over the rows, O(n p²), and K small
/// factorisations of (K−1)(p+1) rows, all by orthogonal transformations.
class FoldedFit {
 public:
  /// x: [n × p] with the intercept as column 0; y: [n]; weights: [n] or size 0; fold_of: [n], values below n_folds.
  FoldedFit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
            const Eigen::Ref<const Eigen::VectorXd>& weights, std::span<const std::uint32_t> fold_of,
            std::size_t n_folds);

  /// Fit on all rows but those of one fold. Errors (kind data): fewer rows than columns, or columns that cannot be told
  /// apart on these rows.
  Result<Solution> without(std::size_t fold) const;
  /// Fit on all rows.
  Result<Solution> all() const;

 private:
  Result<Solution> solve(std::size_t left_out) const;

  Eigen::RowVectorXd centre_, scale_;      // of the columns of x; the intercept has centre 0 and scale 1
  std::vector<Eigen::MatrixXd> triangle_;  // [n_folds], at most p+1 rows, p+1 columns
  std::vector<Eigen::Index> rows_;         // [n_folds] rows in each fold
};

}  // namespace formsieve::fit

// Private to room fit: the columns of a fast fit brought to a common size, their triangle, and the solution from it.
//
// The whitened rows of [1 | x | y] are folded into one triangle block by block, and the small triangle of the
// predictors alone is then factorised with pivoting. Pivoting the triangle is pivoting the design, since both have the
// same inner products; and every row is read from memory once.
#pragma once

#include <formsieve/base.hpp>

#include <Eigen/Core>

#include <span>
#include <vector>

namespace formsieve::fit {

/// A column taken as (value − centre)·2^−exponent: about its mean, and of a size whose square is a double.
struct Standard {
  double centre = 0.0;
  int exponent = 0;
};

/// The columns of a design (intercept first), its response and weights (or size 0). A view of all three.
struct Columns {
  const Eigen::Ref<const Eigen::MatrixXd>& x;
  const Eigen::Ref<const Eigen::VectorXd>& y;
  const Eigen::Ref<const Eigen::VectorXd>& weights;
};

/// [p + 1] of every column, the response last; the intercept stays as it is.
std::vector<Standard> standards_of(const Columns& columns);

/// R, (p + 1) × (p + 1), of the whitened, standardised rows of [1 | x | y]: all rows, or those listed, in that order.
Eigen::MatrixXd triangle_of(const Columns& columns, const std::vector<Standard>& standards);
Eigen::MatrixXd triangle_of(const Columns& columns, const std::vector<Standard>& standards,
                            std::span<const Eigen::Index> rows);

struct TriangleSolution {
  Eigen::VectorXd coefficients;  ///< [p] in the units of the design
  double at_centre = 0.0;        ///< fitted value where every column is at its centre, less the response's centre
  double rss = 0.0;              ///< weighted
};

/// The least-squares solution of the rows that were folded into `triangle`. Rank is decided at n·ε·max|R_ii| of the
/// columns about their mean, at unit norm. Errors (kind data): fewer rows than columns, a dependent or constant column.
/// Cost O(p³).
Result<TriangleSolution> solve_triangle(const Eigen::MatrixXd& triangle, const std::vector<Standard>& standards,
                                        Eigen::Index n_rows);

}  // namespace formsieve::fit

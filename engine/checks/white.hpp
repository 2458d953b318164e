// White's test: does the spread of the residuals depend on the design in any way, squares and products included?
#pragma once

#include <Eigen/Core>

#include <optional>

namespace formsieve::checks {

struct White {
  double lm = 0.0;  ///< n·R² of the squared residuals on the auxiliary design
  double df = 0.0;  ///< rank of the auxiliary design less 1
  double p = 1.0;   ///< of lm by χ²(df)
  double f = 0.0;   ///< the same R² as an F statistic on df and n − df − 1
  double p_f = 1.0;
  /// [n] what the auxiliary regression predicts of the squares, in the units of `squares`
  Eigen::VectorXd predicted;
  double r_squared = 0.0;
};

/// Columns of the auxiliary design with its constant, before what repeats is left out: p(p + 1)/2.
Eigen::Index white_columns(Eigen::Index p);

/// White 1980, section 3: regression of the squared residuals on a constant, the design columns, their squares and
/// cross products. `q` [n × p]: an orthonormal basis of the design with the constant in column 0; since all products
/// are taken, those of the basis span the same space. `squares` [n]: squared residuals, centred. Unset when the
/// auxiliary design is saturated (rank ≥ n). Cost O(n p⁴/4), memory O(n) beside chunks of rows.
std::optional<White> white(const Eigen::Ref<const Eigen::MatrixXd>& q,
                           const Eigen::Ref<const Eigen::VectorXd>& squares);

}  // namespace formsieve::checks

// Private to room fit: what a fit refuses before it starts, and how it says so.
#pragma once

#include <formsieve/base.hpp>

#include <Eigen/Core>

namespace formsieve::fit {

/// Errors (kind data): fewer rows than columns; a value of design, response or weights that is not finite; a weight
/// that is not positive. Asserts that sizes agree and that column 0 is the intercept. Cost O(n p).
Status check_input(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                   const Eigen::Ref<const Eigen::VectorXd>& weights);

/// Whether a column carries information: the root mean square of its deviations exceeds what rounding of its mean and
/// values leaves of a constant, a few ε of its largest value.
bool does_vary(double deviation_rms, double largest);

Error too_few_rows_error(Eigen::Index n_rows, Eigen::Index n_coefficients);
/// The error for a design column that the others determine on these rows (`constant`: the intercept alone does).
Error dependent_column_error(Eigen::Index column, bool constant);

}  // namespace formsieve::fit

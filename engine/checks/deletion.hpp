// What a fit would be without one of its rows, by algebra and not by refitting. For row i of the whitened problem with
// residual e_i (times √w_i) and leverage h_i (Belsley, Kuh & Welsch 1980, chapter 2):
//
//     RSS without i = RSS − e_i²/(1 − h_i),      coefficients: b − b(i) = (X'WX)⁻¹ x_i √w_i e_i/(1 − h_i).
//
// An information criterion without the row is that of n − 1 rows with the same columns: with the figures of the fit,
// fit::own_scale_likelihood(rss_without(subject)[i], n − 1, n_coefficients, log_jacobian − ln|g′(y_i)|,
// half_log_weights − ½ ln w_i). Its size is comparable between candidates (forms of the response included), not with
// criteria on all rows.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

#include <optional>

namespace formsieve::checks {

/// A row of at least this leverage fits itself: some combination of coefficients rests on it alone, and what it would
/// be without the row is 0/0. Rounding leaves such leverages within 1e-12 of 1; the largest honest one in the tests is
/// 0.9928.
inline constexpr double kFullLeverage = 1.0 - 1e-10;

/// Cook 1977: D_i = w_i e_i² h_i / (p·s²·(1 − h_i)²), leverage h of the whitened problem, s² = Σ w e²/(n − p). Rows of
/// full leverage get 0. Requires s > 0.
Eigen::VectorXd cook_distances(const Subject& subject);

/// t_i = e_i/(s(i)·√(1 − h_i)), s(i) the residual standard deviation without the row (Belsley, Kuh & Welsch 1980,
/// "RSTUDENT"). Rows of full leverage get 0; a row without which the fit is exact gets a large finite number. Requires
/// s > 0 and n − p ≥ 2.
Eigen::VectorXd externally_studentised(const Subject& subject);

/// [n] the (weighted) residual sum of squares of the fit without each row; that of all rows where the leverage is full,
/// since such a row has no residual.
Eigen::VectorXd rss_without(const Subject& subject);

/// Two-sided p-value of the largest of n studentised residuals, n·P(|t| > |value|) with n − p − 1 degrees of freedom,
/// at most 1 (Bonferroni). Unset without a degree of freedom.
std::optional<double> outlier_p(const Subject& subject, double studentised);

}  // namespace formsieve::checks

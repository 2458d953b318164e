// Room checks: assumption checks of one fitted candidate. Knows nothing of ranking. May call: base, design, forms,
// results of fit.
#pragma once

#include <formsieve/checks.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <span>
#include <string>
#include <vector>

namespace formsieve::checks {

/// What the checks read of a fit. All on the response form's scale.
struct Subject {
  Eigen::Ref<const Eigen::MatrixXd> x;          ///< [n × p], intercept first
  Eigen::Ref<const Eigen::VectorXd> fitted;     ///< [n]
  Eigen::Ref<const Eigen::VectorXd> residuals;  ///< [n] raw
  Eigen::Ref<const Eigen::VectorXd> leverage;   ///< [n] of the whitened problem
  Eigen::Ref<const Eigen::VectorXd> weights;    ///< [n], or size 0
  double sigma;                                 ///< √(rss/(n − p))
  std::vector<std::size_t>
      term_first;  ///< first design column of each term, for inflation by term (Fox & Monette 1992)
  std::vector<std::string> term_names;
  bool has_order = false;          ///< rows are in a meaningful order: independence is checked
  std::vector<std::size_t> order;  ///< rows in that order, when has_order
};

/// Significance level of a check, on the p-value adjusted over the checks of its candidate. Common practice.
inline constexpr double kLevel = 0.05;
/// Largest variance inflation that passes: 10 is common practice, a standard error √10 ≈ 3 times that of a term
/// unrelated to the others.
inline constexpr double kMostInflation = 10.0;
/// Largest Cook distance that passes: at 1, leaving the row out moves the coefficients to the edge of about a 50 %
/// confidence region (Cook 1977; common practice).
inline constexpr double kMostCookDistance = 1.0;

/// All checks of issue order: normal-residuals, equal-spread, equal-spread-by-term, straightness, separable-terms,
/// no-single-row, independence (only with an order), with Holm-adjusted p-values. A check that the rows cannot support
/// is listed with a note and passes.
std::vector<Check> run_all(const Subject& subject);

/// Names that `rank.require` may hold.
std::vector<std::string> names();

}  // namespace formsieve::checks

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
  bool has_order = false;            ///< rows are in a meaningful order: independence is checked
  std::vector<std::size_t> order;    ///< rows in that order, when has_order
  std::vector<std::size_t> lines{};  ///< [n] where the rows stand in their file, for sentences; or empty
};

/// Significance level of a check, on the p-value adjusted over the checks of its candidate. Common practice.
inline constexpr double kLevel = 0.05;
/// All checks in the order of names(), those of independence only with an order, with Holm-adjusted p-values and
/// verdicts (checks/verdict.hpp). A check that the rows cannot support is listed with a note, passes and has no
/// verdict. Cost O(n k²), and O(n k⁴) within a bound for equal-spread-any-shape.
std::vector<Check> run_all(const Subject& subject);

/// Names that `rank.require` may hold.
std::vector<std::string> names();

}  // namespace formsieve::checks

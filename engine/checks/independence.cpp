#include "checks/durbin_watson.hpp"
#include "checks/words.hpp"
#include "checks/workings.hpp"

#include <algorithm>
#include <utility>

namespace formsieve::checks {

namespace {

/// Up to here the exact p-value costs a few milliseconds at ten columns; beyond, mean and variance give it to 4e-4.
constexpr Eigen::Index kMostExactRows = 5000;
/// Absolute error of the exact tail; smaller p-values hold no digits.
constexpr double kSmallestP = 1e-9;
/// With one residual degree of freedom d can take one value only.
constexpr Eigen::Index kFewestDegreesOfFreedom = 2;

/// Two-sided: neighbours may be alike (d below 2) or alternate (d above 2).
double two_sided_p(const Workings& workings, double d) {
  const auto& order = workings.subject.order;
  const Eigen::MatrixXd& q = workings.of_the_fit().q;
  Eigen::MatrixXd basis(workings.n, workings.p);
  for (std::size_t i = 0; i < order.size(); ++i)
    basis.row(static_cast<Eigen::Index>(i)) = q.row(static_cast<Eigen::Index>(order[i]));
  const DurbinWatsonDistribution distribution(std::move(basis));
  const double below =
      workings.n <= kMostExactRows ? distribution.lower_tail(d) : distribution.lower_tail_by_moments(d);
  return std::clamp(2.0 * std::min(below, 1.0 - below), kSmallestP, 1.0);
}

}  // namespace

Eigen::VectorXd in_order(const Eigen::VectorXd& x, const std::vector<std::size_t>& order) {
  Eigen::VectorXd result(static_cast<Eigen::Index>(order.size()));
  for (std::size_t i = 0; i < order.size(); ++i)
    result[static_cast<Eigen::Index>(i)] = x[static_cast<Eigen::Index>(order[i])];
  return result;
}

bool order_covers_all_rows(const Subject& subject) {
  return static_cast<Eigen::Index>(subject.order.size()) == subject.residuals.size();
}

Check independence(const Workings& workings) {
  Check check = named("independence",
                      workings.n <= kMostExactRows ? "Durbin–Watson, exact, two-sided"
                                                   : "Durbin–Watson, by its mean and variance, two-sided",
                      "neighbouring residuals in the order given are not correlated");
  check.size_words = "no residuals to judge";
  if (!workings.untestable.empty() || !order_covers_all_rows(workings.subject)) {
    check.note = workings.untestable.empty() ? "the order does not cover every row" : workings.untestable;
    return check;
  }
  const Eigen::VectorXd residuals = in_order(workings.residuals, workings.subject.order);
  check.statistic = durbin_watson(residuals);
  check.size = lag_one_autocorrelation(residuals);
  check.size_words = "correlation of neighbouring residuals " + number_words(check.size);
  if (workings.n - workings.p < kFewestDegreesOfFreedom)
    check.note = "too few rows for a p-value";
  else if (!workings.of_the_fit().full_rank)
    check.note = "no p-value: the design columns are not separable";
  else
    check.p = two_sided_p(workings, *check.statistic);
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

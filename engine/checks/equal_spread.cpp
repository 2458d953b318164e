#include "checks/words.hpp"
#include "checks/workings.hpp"

#include <boost/math/distributions/chi_squared.hpp>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <optional>
#include <vector>

namespace formsieve::checks {

namespace {

/// A third of fewer rows has no standard deviation worth the name.
constexpr Eigen::Index kFewestRowsInThird = 3;
/// Ratios beyond this (a third without any spread) are cut off here.
constexpr double kLargestRatio = 1e6;

constexpr const char* kNoSize = "too few rows or fitted values to compare thirds";

double standard_deviation(const Eigen::Ref<const Eigen::VectorXd>& x) {
  return centred(x).stableNorm() / std::sqrt(static_cast<double>(x.size()) - 1.0);
}

std::vector<Eigen::Index> rows_by_fitted(const Subject& subject) {
  std::vector<Eigen::Index> rows(static_cast<std::size_t>(subject.fitted.size()));
  std::iota(rows.begin(), rows.end(), Eigen::Index{0});
  std::stable_sort(rows.begin(), rows.end(),
                   [&](Eigen::Index a, Eigen::Index b) { return subject.fitted[a] < subject.fitted[b]; });
  return rows;
}

/// Standard deviation of the (whitened) residuals in the top third of fitted values over that in the bottom third
/// (⌊n/3⌋ rows each, ties in row order).
std::optional<double> spread_ratio(const Workings& workings) {
  const Eigen::Index third = workings.n / 3;
  if (third < kFewestRowsInThird || workings.p < 2) return std::nullopt;
  const auto rows = rows_by_fitted(workings.subject);
  Eigen::VectorXd bottom(third);
  Eigen::VectorXd top(third);
  for (Eigen::Index i = 0; i < third; ++i) {
    bottom[i] = workings.residuals[rows[static_cast<std::size_t>(i)]];
    top[i] = workings.residuals[rows[static_cast<std::size_t>(workings.n - 1 - i)]];
  }
  const double low = standard_deviation(bottom);
  const double high = standard_deviation(top);
  if (low == 0.0 && high == 0.0) return std::nullopt;
  return low == 0.0 ? kLargestRatio : std::min(high / low, kLargestRatio);
}

void set_size(const Workings& workings, Check& check) {
  check.size = 1.0;
  check.size_words = kNoSize;
  const auto ratio = spread_ratio(workings);
  if (!ratio) return;
  check.size = *ratio;
  check.size_words = "residuals spread " + number_words(*ratio) +
                     " times as widely in the top third of fitted values as in the bottom third";
}

/// Squared residuals over their mean, centred; empty when they are all equal.
Eigen::VectorXd centred_squares(const Workings& workings) {
  Eigen::VectorXd squares = (workings.residuals / workings.residuals.lpNorm<Eigen::Infinity>()).array().square();
  squares /= squares.mean();
  squares = centred(squares);
  constexpr double kAllEqual = 1e-12;  // relative; two rows, or one two-valued column, make them equal by algebra
  if (squares.lpNorm<Eigen::Infinity>() <= kAllEqual) return {};
  return squares;
}

/// Koenker's n·R² of the squared residuals, `r_squared` of them explained by `df` columns.
void set_test(const Workings& workings, double r_squared, double df, Check& check) {
  check.statistic = static_cast<double>(workings.n) * std::clamp(r_squared, 0.0, 1.0);
  check.df = df;
  check.p = boost::math::cdf(boost::math::complement(boost::math::chi_squared(df), *check.statistic));
}

/// Sets size and weights' note, and the reason why there is no test; true when there is one to make.
bool begin(const Workings& workings, Check& check) {
  if (!workings.untestable.empty()) {
    check.size = 1.0;
    check.size_words = "no residuals to judge";
    check.note = workings.untestable;
    return false;
  }
  set_size(workings, check);
  if (workings.p < 2) check.note = "no term, so one fitted value";
  return check.note.empty();
}

}  // namespace

Check equal_spread(const Workings& workings) {
  Check check = named("equal-spread", "Breusch–Pagan (Koenker), against the fitted value",
                      "the residuals spread equally at every fitted value");
  if (!begin(workings, check)) return check;
  const Eigen::VectorXd squares = centred_squares(workings);
  const Eigen::VectorXd fitted = centred(workings.subject.fitted);
  const double length = fitted.stableNorm();
  const double largest = workings.subject.fitted.lpNorm<Eigen::Infinity>();
  if (squares.size() == 0) {
    check.note = "the squared residuals are all equal";
  } else if (!(length > kRoundingShare * largest)) {
    check.note = "the fitted values are all equal";
  } else {
    const double along = squares.dot(fitted) / length;
    set_test(workings, along * along / squares.squaredNorm(), 1.0, check);
  }
  note_weights(workings, check);
  return check;
}

Check equal_spread_by_term(const Workings& workings) {
  Check check = named("equal-spread-by-term", "Breusch–Pagan (Koenker), against all design columns",
                      "the spread of the residuals does not depend on any term");
  if (!begin(workings, check)) return check;
  const Eigen::VectorXd squares = centred_squares(workings);
  if (workings.p == 2) {
    check.note = "one design column: the same test as equal-spread";
  } else if (squares.size() == 0) {
    check.note = "the squared residuals are all equal";
  } else if (!workings.plain.full_rank) {
    check.note = "the design columns are not separable without the weights";
  } else {
    const Eigen::VectorXd along = workings.plain.q.rightCols(workings.p - 1).transpose() * squares;
    set_test(workings, along.squaredNorm() / squares.squaredNorm(), static_cast<double>(along.size()), check);
  }
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

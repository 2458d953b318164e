#include "checks/spread.hpp"
#include "checks/words.hpp"

#include <boost/math/distributions/chi_squared.hpp>

#include <algorithm>
#include <cmath>
#include <vector>

namespace formsieve::checks {

namespace {

constexpr const char* kNoSize = "too few rows or fitted values to compare thirds";

std::string ratio_words(double ratio, const std::string& value) {
  return "residuals spread " + number_words(ratio) + " times as widely in the top third of " + value +
         " as in the bottom third";
}

void set_size(const Workings& workings, Check& check) {
  const auto ratio = spread_ratio(workings, workings.subject.fitted);
  if (!ratio) return;
  check.size = *ratio;
  check.size_words = ratio_words(*ratio, "fitted values");
}

/// Koenker's n·R² of the squared residuals, `r_squared` of them explained by `df` columns.
struct Koenker {
  double statistic, df, p;
};
Koenker koenker(const Workings& workings, double r_squared, double df) {
  const double statistic = static_cast<double>(workings.n) * std::clamp(r_squared, 0.0, 1.0);
  return {statistic, df, boost::math::cdf(boost::math::complement(boost::math::chi_squared(df), statistic))};
}

void set_test(const Koenker& test, Check& check) {
  check.statistic = test.statistic;
  check.df = test.df;
  check.p = test.p;
}

/// Sets the size and the reason why there is no test; true when there is one to make.
bool begin(const Workings& workings, Check& check) {
  check.size = 1.0;
  check.size_words = kNoSize;
  if (!workings.untestable.empty()) {
    check.size_words = "no residuals to judge";
    check.note = workings.untestable;
    return false;
  }
  set_size(workings, check);
  if (workings.p < 2) check.note = "no term, so one fitted value";
  return check.note.empty();
}

/// The squares against the columns of one term alone; unset where they are not separable.
std::optional<Koenker> koenker_of_term(const Workings& workings, const Eigen::VectorXd& squares, std::size_t term) {
  const TermColumns columns = columns_of(workings, term);
  Eigen::MatrixXd alone(workings.n, columns.count() + 1);
  alone.col(0).setOnes();
  alone.rightCols(columns.count()) = workings.subject.x.middleCols(columns.first, columns.count());
  const Basis basis = centred_basis(alone, Eigen::VectorXd(0));
  if (!basis.full_rank) return std::nullopt;
  const Eigen::VectorXd along = basis.q.rightCols(columns.count()).transpose() * squares;
  return koenker(workings, along.squaredNorm() / squares.squaredNorm(), static_cast<double>(columns.count()));
}

/// The test and the ratio by thirds of every term; the check's size is that of the most uneven one.
void fill_parts(const Workings& workings, const Eigen::VectorXd& squares, Check& check) {
  if (!workings.of_the_fit().full_rank) return;
  const Eigen::VectorXd slopes = slopes_of(workings);
  for (std::size_t term = 0; term < n_terms(workings); ++term) {
    CheckPart part;
    part.subject = term_name(workings, term);
    if (const auto test = koenker_of_term(workings, squares, term)) {
      part.statistic = test->statistic;
      part.p = test->p;
    }
    part.size = spread_ratio(workings, term_curve(workings, slopes, term)).value_or(1.0);
    if (unevenness(part.size) > unevenness(check.size) || term == 0) {
      check.size = part.size;
      check.size_words = ratio_words(part.size, part.subject);
    }
    check.parts.push_back(std::move(part));
  }
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
    set_test(koenker(workings, along * along / squares.squaredNorm(), 1.0), check);
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
    const double explained = along.squaredNorm() / squares.squaredNorm();
    set_test(koenker(workings, explained, static_cast<double>(along.size())), check);
    fill_parts(workings, squares, check);
  }
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

#include "pipeline/held_out_intervals.hpp"

#include "backtransform/words.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;
using Rows = std::vector<std::vector<Index>>;

Rows rows_by_fold(std::span<const std::uint32_t> fold_of, std::size_t n_folds) {
  Rows rows(n_folds);
  for (std::size_t i = 0; i < fold_of.size(); ++i) rows[fold_of[i]].push_back(static_cast<Index>(i));
  return rows;
}

/// |response − prediction|·√w of some rows by one fit, rising.
std::vector<double> absolute_residuals(const FittedRows& rows, const std::vector<Index>& of,
                                       const Eigen::VectorXd& coefficients) {
  std::vector<double> residuals;
  residuals.reserve(of.size());
  for (const Index i : of)
    residuals.push_back(std::abs(rows.z[i] - rows.x.row(i).dot(coefficients)) * std::sqrt(rows.weight(i)));
  std::sort(residuals.begin(), residuals.end());
  return residuals;
}

/// `most` of `n` indices, evenly spaced; all when there are no more.
std::vector<std::size_t> evenly(std::size_t n, std::size_t most) {
  const std::size_t count = std::min(n, most);
  std::vector<std::size_t> chosen(count);
  for (std::size_t k = 0; k < count; ++k) chosen[k] = k * n / count;
  return chosen;
}

/// Tries the CV+ interval that the other folds make on the rows of one.
Status try_outer_fold(const FittedRows& rows, const Rows& of_fold, const fit::FoldedFit& folded, std::size_t outer,
                      std::size_t most_rows, CoverageTally& tally) {
  const auto solutions = folded.without_each_beside(outer);
  if (!solutions) return solutions.error();
  std::vector<std::vector<double>> residuals(of_fold.size());
  for (std::size_t g = 0; g < of_fold.size(); ++g)
    if (g != outer) residuals[g] = absolute_residuals(rows, of_fold[g], (*solutions)[g].coefficients);
  const backtransform::CrossInterval interval(rows.response, std::move(residuals), rows.weights.size() > 0);
  std::vector<double> predictions(of_fold.size());
  for (const std::size_t k : evenly(of_fold[outer].size(), most_rows)) {
    const Index i = of_fold[outer][k];
    for (std::size_t g = 0; g < predictions.size(); ++g)
      predictions[g] = rows.x.row(i).dot((*solutions)[g].coefficients);
    tally.add(interval.in_own_units(predictions, rows.weight(i)), rows.measured_own[static_cast<std::size_t>(i)]);
  }
  return {};
}

backtransform::Interval unjudged(std::string note) {
  backtransform::Interval interval = CoverageTally().result("CV+");
  interval.note = std::move(note);
  return interval;
}

}  // namespace

void CoverageTally::add(backtransform::Ends ends, double measured) {
  if (measured < ends.lower) ++below_;
  if (measured > ends.upper) ++above_;
  widths_.push_back(ends.upper - ends.lower);
}

backtransform::Interval CoverageTally::result(std::string method) const {
  backtransform::Interval interval;
  interval.method = std::move(method);
  interval.level = backtransform::kIntervalLevel;
  if (widths_.empty()) return interval;
  const auto n = static_cast<double>(widths_.size());
  interval.below = static_cast<double>(below_) / n;
  interval.above = static_cast<double>(above_) / n;
  interval.coverage = static_cast<double>(widths_.size() - below_ - above_) / n;
  std::vector<double> widths = widths_;
  std::sort(widths.begin(), widths.end());
  const std::size_t half = widths.size() / 2;
  const double median = widths.size() % 2 == 1 ? widths[half] : 0.5 * (widths[half - 1] + widths[half]);
  if (std::isfinite(median))
    interval.median_width_own = median;
  else
    interval.note = "half of the intervals and more have no end on one side";
  return interval;
}

backtransform::Interval judged_cross_interval(const FittedRows& rows, const fit::FoldedFit& first_repeat) {
  const std::size_t n_folds = rows.folds.count;
  if (n_folds < 3) return unjudged("judging CV+ takes three folds: one to try it on, two to build it from");
  const Rows of_fold = rows_by_fold(rows.folds.fold_of.front(), n_folds);
  const std::size_t affordable = kMostNestedRows / rows.measured_own.size();
  const auto outer_folds = evenly(n_folds, std::clamp(affordable, kFewestOuterFolds, kMostOuterFolds));
  const std::size_t most_rows = std::max<std::size_t>(1, kMostJudgedRows / outer_folds.size());
  CoverageTally tally;
  std::size_t tried_of = 0, tried = 0;
  for (const std::size_t outer : outer_folds) {
    if (const Status status = try_outer_fold(rows, of_fold, first_repeat, outer, most_rows, tally); !status)
      return unjudged("CV+ cannot be judged on these folds: " + status.error().message);
    tried_of += of_fold[outer].size();
    tried += std::min(of_fold[outer].size(), most_rows);
  }
  backtransform::Interval interval = tally.result("CV+");
  if (outer_folds.size() < n_folds || tried < tried_of)
    interval.note += (interval.note.empty() ? "" : "; ") + std::string("judged on ") +
                     backtransform::number_words(static_cast<double>(tried)) + " held-out rows, evenly spaced";
  return interval;
}

Result<backtransform::IntervalBasis> interval_basis(const FittedRows& rows, const fit::FoldedFit& first_repeat) {
  const auto all = first_repeat.all();
  if (!all) return all.error();
  auto root = first_repeat.inverse_root_of_all();
  if (!root) return root.error();
  backtransform::IntervalBasis basis;
  basis.coefficients = all->coefficients;
  basis.inverse_root = std::move(*root);
  basis.df = static_cast<double>(rows.x.rows() - rows.x.cols());
  basis.sigma = basis.df > 0.0 ? std::sqrt(all->rss / basis.df) : std::numeric_limits<double>::quiet_NaN();
  basis.weighted = rows.weights.size() > 0;
  const Rows of_fold = rows_by_fold(rows.folds.fold_of.front(), rows.folds.count);
  basis.fold_coefficients.resize(rows.x.cols(), static_cast<Index>(of_fold.size()));
  for (std::size_t g = 0; g < of_fold.size(); ++g) {
    const auto without = first_repeat.without(g);
    if (!without) return without.error();
    basis.fold_coefficients.col(static_cast<Index>(g)) = without->coefficients;
    basis.residuals.push_back(absolute_residuals(rows, of_fold[g], without->coefficients));
  }
  return basis;
}

}  // namespace formsieve::pipeline

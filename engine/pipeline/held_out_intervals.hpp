// Prediction intervals judged by rows that their making has not seen, and what they need of a fit to be made for new
// rows.
#pragma once

#include <formsieve/backtransform.hpp>

#include "backtransform/intervals.hpp"
#include "pipeline/fitted_rows.hpp"

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// Outer folds on which CV+ is judged at most, evenly spaced among the folds: each costs as many small solutions as
/// there are folds.
inline constexpr std::size_t kMostOuterFolds = 20;
/// Rows that the outer folds refit from in all, so that judging costs little beside the examination of a large table;
/// beyond it there are fewer outer folds, but three.
inline constexpr std::size_t kMostNestedRows = 1000000;
inline constexpr std::size_t kFewestOuterFolds = 3;
/// Held-out rows on which CV+ is judged at most, evenly spaced: the standard error of a coverage of 95 % is then 0.3 %.
inline constexpr std::size_t kMostJudgedRows = 5000;

/// Counts of measured values inside, below and above their intervals, and the widths of these.
class CoverageTally {
 public:
  void add(backtransform::Ends ends, double measured);
  /// The result so far; without any row the figures are unset.
  backtransform::Interval result(std::string method) const;

 private:
  std::size_t below_ = 0, above_ = 0;
  std::vector<double> widths_;
};

/// Coverage of the CV+ interval over the first repeat, nested: for each outer fold, CV+ is built from the other folds
/// alone, each of them left out in turn, and tried on the rows of the outer fold. Where that needs fits that do not
/// exist (two folds, a part that cannot support the design), the figures are unset and the note says why.
backtransform::Interval judged_cross_interval(const FittedRows& rows, const fit::FoldedFit& first_repeat);

/// What intervals at new rows need: the fit on all rows, and those of the first repeat. Errors as FoldedFit.
Result<backtransform::IntervalBasis> interval_basis(const FittedRows& rows, const fit::FoldedFit& first_repeat);

}  // namespace formsieve::pipeline

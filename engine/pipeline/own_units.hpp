// Back to own units for one listed candidate: every correction with its held-out figures, the one in use, intervals
// with their held-out coverage, and effects.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/judge.hpp>

#include "backtransform/corrections.hpp"
#include "fit/least_squares.hpp"
#include "pipeline/fitted_rows.hpp"

#include <memory>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// Every correction of the response form on the rows in use (factor, shift) and on held-out rows (bias, RMSE), with
/// everything taken from training parts, over the folds and repeats of CV RMSE; the one in use, and why.
struct OwnUnits {
  std::vector<backtransform::Correction> corrections;
  std::unique_ptr<const backtransform::MeanCorrection> used;  ///< of the fit on all rows
  std::string used_name, why_used, mean_median_words;
  std::string formula;                 ///< of the one in use, around the right-hand side
  double smearing_factor = 1.0;        ///< as backtransform::Summary::smearing_factor
  std::optional<double> r2_own_units;  ///< 1 − SSE/TSS of the smeared predictions on the rows in use
  backtransform::Interval normal;      ///< the normal-theory interval on held-out rows
};

/// `first_repeat`: of the folds. `spread_broken`: the check of equal spread is broken. `right_hand_side`: of the
/// equation, for the formula. Errors as FoldedFit. Cost O(repeats · n · p²) and corrections · repeats · n means.
Result<OwnUnits> own_units(const FittedRows& rows, const fit::Fit& fit, const fit::FoldedFit& first_repeat,
                           bool spread_broken, const std::string& response_column, const std::string& right_hand_side);

}  // namespace formsieve::pipeline

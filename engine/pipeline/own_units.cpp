#include "pipeline/own_units.hpp"

#include "backtransform/choice.hpp"
#include "backtransform/intervals.hpp"
#include "backtransform/words.hpp"
#include "base/sums.hpp"
#include "pipeline/held_out_intervals.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::pipeline {

namespace {

using backtransform::Method;
using Eigen::Index;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Held-out predictions of every method by repeat and row, flattened.
struct HeldOut {
  std::vector<std::vector<double>> means;  ///< [methods][repeats · n]
  std::vector<double> eta;                 ///< [repeats · n]
  CoverageTally normal;
};

void predict(const FittedRows& rows, const TrainingPart& part, const std::vector<Method>& methods, std::size_t offset,
             HeldOut& held) {
  const backtransform::TrainingFit training{rows.response,     part.fitted, part.residuals, part.weights,
                                            part.measured_own, part.sigma,  part.df};
  for (std::size_t m = 0; m < methods.size(); ++m) {
    const auto correction = backtransform::make_correction(methods[m], training);
    for (std::size_t k = 0; k < part.held_out.size(); ++k) {
      const auto at = static_cast<Index>(k);
      const Index row = part.held_out[k];
      held.means[m][offset + static_cast<std::size_t>(row)] =
          correction->mean({part.eta[at], part.leverage[at], rows.weight(row)});
    }
  }
  const backtransform::NormalInterval normal(rows.response, part.sigma, part.df);
  for (std::size_t k = 0; k < part.held_out.size(); ++k) {
    const auto at = static_cast<Index>(k);
    const Index row = part.held_out[k];
    held.eta[offset + static_cast<std::size_t>(row)] = part.eta[at];
    held.normal.add(normal.in_own_units(part.eta[at], part.leverage[at], rows.weight(row)),
                    rows.measured_own[static_cast<std::size_t>(row)]);
  }
}

Status predict_repeat(const FittedRows& rows, std::size_t repeat, const fit::FoldedFit& folded,
                      const std::vector<Method>& methods, HeldOut& held) {
  for (std::size_t fold = 0; fold < rows.folds.count; ++fold) {
    const auto part = training_part(rows, rows.folds.fold_of[repeat], folded, fold);
    if (!part) return part.error();
    predict(rows, *part, methods, repeat * rows.measured_own.size(), held);
  }
  return {};
}

Result<HeldOut> held_out(const FittedRows& rows, const std::vector<Method>& methods,
                         const fit::FoldedFit& first_repeat) {
  const std::size_t entries = rows.folds.repeats * rows.measured_own.size();
  HeldOut held;
  held.eta.resize(entries);
  held.means.assign(methods.size(), std::vector<double>(entries));
  if (auto status = predict_repeat(rows, 0, first_repeat, methods, held); !status) return status.error();
  for (std::size_t repeat = 1; repeat < rows.folds.repeats; ++repeat) {
    const fit::FoldedFit folded(rows.x, rows.z, rows.weights, rows.folds.fold_of[repeat], rows.folds.count);
    if (auto status = predict_repeat(rows, repeat, folded, methods, held); !status) return status.error();
  }
  return held;
}

/// Means on the rows in use by one correction of the fit on all of them.
std::vector<double> means_in_use(const FittedRows& rows, const fit::Fit& fit,
                                 const backtransform::MeanCorrection& correction) {
  std::vector<double> means(rows.measured_own.size());
  for (std::size_t i = 0; i < means.size(); ++i) {
    const auto row = static_cast<Index>(i);
    const double weight = rows.weight(row);
    means[i] = correction.mean({fit.fitted[row], fit.leverage[row] / weight, weight});
  }
  return means;
}

std::size_t place_of(Method method, const std::vector<Method>& methods) {
  return static_cast<std::size_t>(std::find(methods.begin(), methods.end(), method) - methods.begin());
}

bool is_among(Method method, const std::vector<Method>& methods) { return place_of(method, methods) < methods.size(); }

std::string note_of(Method method, const FittedRows& rows, const backtransform::ThirdsSmearing& thirds) {
  switch (method) {
    case Method::none:
      return "a median where residuals are symmetric, not a mean";
    case Method::normal_theory:
      return is_among(Method::unbiased, backtransform::methods_for(rows.response))
                 ? "exp(s²/2), s the residual sd of the logarithm"
                 : "by Gauss–Hermite quadrature";
    case Method::unbiased:
      return "the factor depends on a row's leverage";
    case Method::thirds:
      return thirds.complete() ? "" : "a third of few rows uses the residuals of all";
    default:
      return {};
  }
}

/// Factor and shift against the uncorrected mean on the rows in use.
void set_size(backtransform::Correction& correction, double mean, double uncorrected) {
  correction.factor = mean / uncorrected;
  if (std::isfinite(mean - uncorrected)) correction.shift = mean - uncorrected;
  if (!std::isfinite(correction.factor)) {
    correction.factor = kNaN;
    correction.note += (correction.note.empty() ? "" : "; ") + std::string("undefined on some of the rows in use");
  }
}

std::optional<double> r2_of(const std::vector<double>& mean, std::span<const double> measured) {
  std::vector<double> error(mean.size());
  std::transform(mean.begin(), mean.end(), measured.begin(), error.begin(), [](double m, double y) { return y - m; });
  const double sse = base::sum_of_squares(error, 0.0);
  if (!std::isfinite(sse)) return std::nullopt;
  return 1.0 - sse / base::sum_of_squares(measured, base::mean(measured));
}

backtransform::Choice chosen(const FittedRows& rows, bool spread_broken, const std::vector<Method>& methods,
                             const HeldOut& held) {
  if (!is_among(Method::thirds, methods)) return backtransform::choice_of_identity();
  return backtransform::choose(spread_broken,
                               {held.eta, rows.measured_own, held.means[place_of(Method::smearing, methods)],
                                held.means[place_of(Method::thirds, methods)]});
}

}  // namespace

Result<OwnUnits> own_units(const FittedRows& rows, const fit::Fit& fit, const fit::FoldedFit& first_repeat,
                           bool spread_broken, const std::string& response_column, const std::string& right_hand_side) {
  const std::vector<Method> methods = backtransform::methods_for(rows.response);
  const auto held = held_out(rows, methods, first_repeat);
  if (!held) return held.error();
  const Eigen::Map<const Eigen::VectorXd> measured(rows.measured_own.data(), fit.fitted.size());
  const double df = static_cast<double>(rows.x.rows() - rows.x.cols());
  const backtransform::TrainingFit all{rows.response, fit.fitted, fit.residuals, rows.weights, measured, fit.sigma, df};
  const backtransform::ThirdsSmearing thirds(all);
  const backtransform::Smearing smearing(rows.response, fit.residuals, rows.weights);

  OwnUnits own;
  double uncorrected = kNaN, smeared = kNaN;
  for (std::size_t m = 0; m < methods.size(); ++m) {
    const auto means = means_in_use(rows, fit, *backtransform::make_correction(methods[m], all));
    const double mean = base::mean(means);
    if (methods[m] == Method::none) uncorrected = mean;
    auto correction =
        backtransform::judged(backtransform::method_name(methods[m]), 1.0, held->means[m], rows.measured_own);
    correction.note = note_of(methods[m], rows, thirds);
    set_size(correction, mean, uncorrected);
    if (methods[m] == Method::smearing) {
      smeared = mean;
      own.r2_own_units = r2_of(means, rows.measured_own);
      if (const auto constant = smearing.constant_factor()) correction.factor = *constant;
      if (std::isfinite(correction.factor)) own.smearing_factor = correction.factor;
    }
    own.corrections.push_back(std::move(correction));
  }
  const auto choice = chosen(rows, spread_broken, methods, *held);
  own.used = backtransform::make_correction(choice.used, all);
  own.used_name = backtransform::method_name(choice.used);
  own.why_used = choice.why;
  own.mean_median_words = backtransform::mean_median_words(rows.response, smeared, uncorrected);
  own.formula = choice.used == Method::thirds ? backtransform::formula(thirds, response_column, right_hand_side)
                                              : backtransform::formula(smearing, response_column, right_hand_side);
  own.normal = held->normal.result("normal theory");
  return own;
}

}  // namespace formsieve::pipeline

#include "pipeline/penalties.hpp"

#include "fit/least_squares.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::pipeline {

namespace {

/// With fewer residual degrees of freedom the RSS, and any criterion with it, is rounding noise
/// (tests/proof: random spaces of 9 to 14 rows).
constexpr std::size_t kLeastResidualDegrees = 2;

std::size_t most_columns(const search::Space& space) {
  std::size_t columns = 0;
  for (const auto& predictor : space.predictors) {
    std::size_t widest = 0;
    for (const auto& form : predictor.forms) widest = std::max(widest, form.n_columns);
    columns += widest;
  }
  return columns;
}

double penalty_of(judge::Criterion criterion, std::size_t n_coefficients, std::size_t n_rows) {
  switch (criterion) {
    case judge::Criterion::aicc:
      return fit::aicc_penalty(n_coefficients, n_rows);
    case judge::Criterion::bic:
      return fit::bic_penalty(n_coefficients, n_rows);
    default:
      return fit::aic_penalty(n_coefficients);
  }
}

}  // namespace

judge::Criterion criterion_of(const std::string& name) {
  if (name == "aic") return judge::Criterion::aic;
  if (name == "aicc") return judge::Criterion::aicc;
  if (name == "bic") return judge::Criterion::bic;
  return judge::Criterion::cv_rmse;
}

std::vector<double> penalties(const Prepared& prepared, judge::Criterion criterion) {
  std::vector<double> penalty;
  for (std::size_t k = 0; k <= most_columns(prepared.space); ++k) {
    const bool saturated = k + 1 + kLeastResidualDegrees > prepared.data.n_rows;
    penalty.push_back(saturated ? std::numeric_limits<double>::infinity()
                                : penalty_of(criterion, k + 1, prepared.data.n_rows));
  }
  return penalty;
}

}  // namespace formsieve::pipeline

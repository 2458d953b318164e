// Penalties of an information criterion, as the walk takes them.
#pragma once

#include <formsieve/judge.hpp>

#include "pipeline/prepare.hpp"

#include <string>
#include <vector>

namespace formsieve::pipeline {

/// "cv_rmse", "aic", "aicc" or "bic", as a plan says it.
judge::Criterion criterion_of(const std::string& name);

/// Penalty by number of design columns without the intercept, 0 … the most that a candidate of the space can have; of
/// AIC where the criterion is not an information criterion.
std::vector<double> penalties(const Prepared& prepared, judge::Criterion criterion);

}  // namespace formsieve::pipeline

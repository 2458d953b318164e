// Advice in words about one numeric column. None of it filters: the search decides.
#pragma once

#include <formsieve/survey.hpp>

#include <string>
#include <vector>

namespace formsieve::survey {

/// Sentences about a column whose figures are filled in: undefined moments, the log rule and the range rule (Weisberg,
/// Applied Linear Regression), skewness that rests on few rows, a substitute for a MAD of 0, a Box–Cox power at the end
/// of its range, many missing values. What is common practice, or our own judgement, says so.
std::vector<std::string> advice(const ColumnProfile& profile, bool outlying_by_mean_deviation);

}  // namespace formsieve::survey

// The criteria by their names in plans and files. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include "report/json_reader.hpp"

#include <array>
#include <string>
#include <string_view>
#include <utility>

namespace formsieve::report {

inline constexpr std::array<std::pair<judge::Criterion, std::string_view>, 4> kCriterionNames{
    {{judge::Criterion::cv_rmse, "cv_rmse"},
     {judge::Criterion::aic, "aic"},
     {judge::Criterion::aicc, "aicc"},
     {judge::Criterion::bic, "bic"}}};

std::string criterion_text(judge::Criterion criterion);

/// `when_absent` where the key is not there. Trouble: another name.
judge::Criterion read_criterion(const Node& node, judge::Criterion when_absent);

}  // namespace formsieve::report

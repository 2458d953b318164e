// The criteria by their names in plans and files. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include <array>
#include <string_view>
#include <utility>

namespace formsieve::report {

inline constexpr std::array<std::pair<judge::Criterion, std::string_view>, 4> kCriterionNames{
    {{judge::Criterion::cv_rmse, "cv_rmse"},
     {judge::Criterion::aic, "aic"},
     {judge::Criterion::aicc, "aicc"},
     {judge::Criterion::bic, "bic"}}};

}  // namespace formsieve::report

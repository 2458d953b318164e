// What the examination said of one candidate, read back. Keys that earlier writers did not have may be absent. Private
// to room report.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/checks.hpp>

#include "report/json_reader.hpp"

namespace formsieve::report {

checks::Check read_check(const Node& node);
checks::Influence read_influence(const Node& node);  ///< empty when absent
backtransform::Summary read_back(const Node& node);
backtransform::Effect read_effect(const Node& node);

}  // namespace formsieve::report

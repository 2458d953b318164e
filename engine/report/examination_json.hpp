// What the examination says of one candidate, as JSON. Private to room report.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/checks.hpp>

#include "report/json_text.hpp"

namespace formsieve::report {

Json check_json(const checks::Check& check);
Json influence_json(const checks::Influence& influence);
Json back_json(const backtransform::Summary& back);
Json effect_json(const backtransform::Effect& effect);

}  // namespace formsieve::report

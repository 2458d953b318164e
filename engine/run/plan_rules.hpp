// Settings of a plan that are each right and together wrong. Private to room run.
#pragma once

#include "run/plan_findings.hpp"

namespace formsieve::run {

/// Finds what is missing and what contradicts something else.
void check_rules(const Plan& plan, Findings& findings);

}  // namespace formsieve::run

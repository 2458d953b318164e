// The whole-space summary as keys of shortlist.json. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include "report/json_text.hpp"

#include <vector>

namespace formsieve::report {

/// An object with the keys "summary_criterion", "response_profile", "form_profile", "by_terms" and
/// "score_distribution"; without keys when there is no summary. Lists "by_response" have one entry a response form.
Json summary_json(const judge::SpaceSummary& summary, const std::vector<forms::Form>& responses);

}  // namespace formsieve::report

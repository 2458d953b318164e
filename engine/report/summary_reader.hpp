// The whole-space summary read back from shortlist.json. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include "report/json_reader.hpp"

#include <cstddef>

namespace formsieve::report {

/// `root` is the whole file; empty where it has no "response_profile". Trouble: lists that do not have one entry a
/// response form, a histogram without one edge more than counts.
judge::SpaceSummary read_summary(const Node& root, std::size_t n_responses);

}  // namespace formsieve::report

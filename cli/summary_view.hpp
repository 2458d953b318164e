// The whole space in two tables: what each form of a predictor costs, and the error by number of terms.
#pragma once

#include "page.hpp"

#include <formsieve/judge.hpp>

namespace formsieve::cli {

/// Both tables and what their figures are, for the response form of `chosen`. Nothing when the run holds no summary.
/// `whole`: no table is cut to a screen.
void summary_tables(Page& page, const judge::Shortlist& shortlist, const judge::Candidate& chosen, bool whole = false);

}  // namespace formsieve::cli

// Handmade records for looking at the drawing: figures are invented and hang together only as far as a reader of the
// screen would notice.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/survey.hpp>

namespace formsieve::cli::samples {

/// Four columns: a right-skewed area, a reflected percentage with outliers, a constant, a text column.
survey::Survey survey();

/// Four candidates under three response forms; marks on the first, second and fourth.
judge::Shortlist shortlist();

}  // namespace formsieve::cli::samples

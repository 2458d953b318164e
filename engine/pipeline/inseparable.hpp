// Candidates that the walk could not enter, in words.
#pragma once

#include "base/gram.hpp"
#include "pipeline/prepare.hpp"
#include "search/walk.hpp"

#include <string>
#include <vector>

namespace formsieve::pipeline {

/// Names the predictors behind inseparable candidates, a sentence each; nothing when there were none.
std::vector<std::string> inseparable_words(const Prepared& prepared, const base::GramSet& grams,
                                           const search::WalkResult& walked, double smallest_pivot_rel);

}  // namespace formsieve::pipeline

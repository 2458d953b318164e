// The walk in plain form, one candidate after another: the oracle of search::walk. Same results, to rounding; makes no
// summary.
#pragma once

#include "search/walk.hpp"

namespace formsieve::plain {

search::WalkResult walk(const search::Space& space, const base::GramSet& grams, const search::WalkOptions& options);

}  // namespace formsieve::plain

// The bound of a node on the RSS alone, made as good as is worth while.
#pragma once

#include "proof/leaves.hpp"
#include "proof/node_work.hpp"
#include "proof/refinement.hpp"

namespace formsieve::proof {

/// Improves the bound of `node`, a score with a penalty of zero; narrows its actions, raises `lower`, and leaves in it
/// what the children inherit. The threshold must be finite.
///
/// Without a price of columns every predictor may as well be in with its best form: v and D are steered as if all had
/// to be (the term of the relaxation is s² then, form_scales.hpp), and λ is only the unit of what a change is worth.
/// Where max_terms leaves fewer predictors than are open, λ is the price at which no more than those are worth it.
Refined refine_by_rss(const Frozen& frozen, const LeafEffort& effort, const Reduced& problem, Node& node);

}  // namespace formsieve::proof

// Spaces that are not visited: what the proof and the guided search found, as the lists that the pool is taken from.
#pragma once

#include <formsieve/run.hpp>

#include "base/gram.hpp"
#include "pipeline/pool.hpp"
#include "pipeline/prepare.hpp"
#include "pipeline/proving.hpp"
#include "proof/bounded_walk.hpp"
#include "search/guided.hpp"
#include "search/walk.hpp"

#include <string>

namespace formsieve::pipeline {

/// What a search of such a space found; either may be missing.
struct Beyond {
  const Proved* proved = nullptr;
  const search::GuidedResult* guided = nullptr;
  const proof::BoundedWalk* bounded = nullptr;
};

/// Lists like the walk's, over the near-best set of the proof and the lists of the guided search and of the bounded
/// walk together: by held-out error on the form's scale, by the criterion, and what the guided search found in own
/// units. Held-out errors come from the Gram matrices; candidates that are inseparable in a fold are left out and
/// counted. n_scored is the number of candidates whose held-out error was worked out. The same for any number of
/// threads.
search::WalkResult beyond_lists(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                                const Beyond& beyond, unsigned threads);

/// How the pool was formed, in words; `pool` the pooled candidates.
std::string beyond_pool_words(const run::Plan& plan, const Beyond& beyond, const std::vector<search::Scored>& pool);

/// How sure the guided search may be, in words; empty when there was none.
std::string guided_words(const search::GuidedResult& guided);

}  // namespace formsieve::pipeline

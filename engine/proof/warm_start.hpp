// Where many proofs of one problem begin.
#pragma once

#include "proof/node.hpp"
#include "proof/prove.hpp"
#include "proof/scope.hpp"

#include <memory>
#include <vector>

namespace formsieve::proof {

/// A point of the dual for every response form, of all actions that a restriction leaves: with any of them taken away
/// or fixed it stays valid (node.hpp), and near the best where the restriction changes little.
struct WarmStart {
  std::vector<std::shared_ptr<const Inherited>> roots;  ///< [n_responses] null where there is none
};

/// For Limits::start of proofs whose restrictions lie within this one. Cost: local search and the sweeps of a root for
/// every response form. The same for any number of threads.
WarmStart warm_start(const RootGram& root, const Restriction& restriction, unsigned threads);
WarmStart warm_start(const RootGram& root, const Restriction& restriction, unsigned threads, const Effort& effort);

}  // namespace formsieve::proof

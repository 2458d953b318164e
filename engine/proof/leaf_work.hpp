// What is done at one node of the tree of leaves.
#pragma once

#include "proof/leaves.hpp"
#include "proof/node_work.hpp"

#include <cstddef>
#include <functional>
#include <optional>
#include <vector>

namespace formsieve::proof {

struct LeafWork {
  std::vector<Leaf> leaves;
  std::vector<Node> children;
  std::optional<Node> unfinished;
  search::BigCount n_cut;
};

/// Bounds a node, strikes off what cannot be under the threshold, and cuts it, makes leaves of it or branches on the
/// predictor whose decision raises the bounds most.
LeafWork work_on_leaves(const Frozen& frozen, const LeafEffort& effort, Node node);

/// All candidates of a response form.
Scope scope_of_response(const RootGram& root, std::size_t response);
/// What nodes go by when candidates with an RSS above `largest_rss` need not be in any leaf.
Frozen freeze(const RootGram& root, const Scope& scope, double largest_rss, const std::function<bool()>& expired);

}  // namespace formsieve::proof

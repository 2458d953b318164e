// The fixed split of a walk into independent parts.
#pragma once

#include "plain/subtree_walker.hpp"
#include "plain/tree.hpp"

#include <cstdint>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// The subtree size beyond which a node is a part of its own: a small share of the space, so that the parts are many
/// enough for any machine, and never so small that reaching a node costs more than what is below it.
std::uint64_t largest_subtree(const Tree& tree);

/// Every node with more than `largest_subtree` candidates below it, and the root: together, each walked without what
/// belongs to another, they are the whole space. Depends on the space alone.
std::vector<Path> split(const Tree& tree, std::uint64_t largest_subtree);

}  // namespace formsieve::plain

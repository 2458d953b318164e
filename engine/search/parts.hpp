// The fixed split of a walk into independent parts.
#pragma once

#include "search/outer_tree.hpp"

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::search {

/// A piece of the walk: what lies below a node of the kernel under an outer node, without what belongs to other parts.
struct Part {
  OuterPath outer;
  std::vector<std::size_t> lanes;  ///< picked in the kernel; with any, the outer node's own candidate is not in it
  bool with_outer = false;         ///< all outer nodes below belong to the part too
};

/// The subtree size beyond which a node is a part of its own: a small share of the space, so that the parts are many
/// enough for any machine, and never so small that reaching a node costs more than what is below it.
std::uint64_t largest_subtree(const OuterTree& tree);

/// Parts that together are the whole space. Depends on the space alone.
std::vector<Part> split(const OuterTree& tree, std::uint64_t largest);

}  // namespace formsieve::search

// The nodes of the tree that are still to be worked on.
#pragma once

#include "proof/node.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::proof {

/// Lowest bound first, ties by number, as long as there is room. Once so many nodes are open that their memory would
/// pass the limit, new nodes are stacked and the last stacked taken first: the deepest, whose subtrees end soonest;
/// then memory grows by at most depth × actions × batch nodes more.
class OpenNodes {
 public:
  /// Bytes for all of them; a node's share is estimated from the numbers of predictors and columns.
  void limit(std::size_t bytes, std::size_t n_predictors, std::size_t n_columns);

  /// The number that the node is given.
  std::uint64_t push(Node node);
  /// At most so many, best first; nodes stacked beyond the limit come first.
  std::vector<Node> pop(std::size_t most);
  /// Drops nodes whose bound lies above.
  void cut_above(double limit);

  void clear();

  bool empty() const { return queue_.empty() && stack_.empty(); }
  std::size_t size() const { return queue_.size() + stack_.size(); }
  /// The lowest bound; +infinity when empty.
  double lower() const;
  double lower(std::size_t response) const;
  bool has(std::size_t response) const;

 private:
  static bool later(const Node& a, const Node& b);

  std::vector<Node> queue_;  ///< a heap, the best on top
  std::vector<Node> stack_;
  std::size_t most_queued_ = static_cast<std::size_t>(-1);
  std::uint64_t next_number_ = 0;
};

}  // namespace formsieve::proof

// The part of a space that a limit on the residual sum of squares leaves, in pieces small enough to be walked.
#pragma once

#include "proof/problem.hpp"
#include "proof/scope.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <limits>
#include <memory>
#include <optional>
#include <span>
#include <vector>

namespace formsieve::proof {

struct Node;

/// How the tree is grown. What is found does not depend on it.
struct LeafEffort {
  /// Candidates of a leaf at most: about a tenth of a second of walking, ten times what a node costs. Smaller leaves
  /// leave hardly fewer candidates.
  std::uint64_t leaf_size = 10'000'000;
  std::size_t batch = 32;        ///< nodes worked on against one limit
  std::size_t root_sweeps = 60;  ///< passes of block-coordinate ascent
  std::size_t node_sweeps = 3;
  bool superset = false;  ///< the RSS with every form left as the only bound: for comparison
};

/// Candidates that could not be cut: all that choose one of these actions for every predictor, within max_terms.
struct Leaf {
  std::vector<Actions> actions;  ///< [n_predictors]
  double lower = 0.0;            ///< ln of a lower bound on the RSS of each, in units of the Gram matrix, times rows
  search::BigCount size;
};

/// Candidates of one response form that choose among these actions.
search::BigCount count_candidates(const search::Space& space, std::span<const Actions> actions);

/// Depth first, so that the open nodes stay few. The root Gram's penalty must be zero for every number of columns, and
/// so must be its constants.
class LeafTree {
 public:
  /// Begins with all candidates of the response form.
  LeafTree(const RootGram& root, std::size_t response, const LeafEffort& effort);
  ~LeafTree();
  LeafTree(LeafTree&&) noexcept;

  /// Works on the next batch of nodes and returns the leaves among them in a fixed order. Candidates with an RSS above
  /// `largest_rss`, in units of the Gram matrix, need not be in any leaf; it may fall from call to call. The same for
  /// any number of threads. `expired` is asked now and then; once true, nodes stay open.
  std::vector<Leaf> grow(double largest_rss, unsigned threads, const std::function<bool()>& expired);
  bool done() const;

  std::uint64_t n_nodes() const { return n_nodes_; }
  const search::BigCount& n_cut() const { return n_cut_; }
  /// Candidates of the nodes still open.
  search::BigCount n_open() const;

 private:
  const RootGram* root_;
  LeafEffort effort_;
  Scope scope_;
  std::vector<Node> open_;  ///< the next at the end
  search::BigCount n_cut_;
  std::uint64_t n_nodes_ = 0;
};

}  // namespace formsieve::proof

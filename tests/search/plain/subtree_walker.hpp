// One worker of the walk: its workspaces, its lists and the recursion over a subtree.
#pragma once

#include "search/best_list.hpp"
#include "plain/elimination_kernel.hpp"
#include "plain/partial_grams.hpp"
#include "plain/pivot_rows.hpp"
#include "plain/tree.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// A node, by the forms picked on the way to it (indices into Tree::forms).
using Path = std::vector<std::size_t>;

/// Scores subtrees one after another and keeps the best. All memory is taken on construction.
/// What it has found after a set of subtrees does not depend on their order.
class SubtreeWalker {
 public:
  /// Subtrees of more than `largest_subtree` candidates (of one response) below the start of a walk are left out: they
  /// are walks of their own. The arguments must outlive the walker.
  SubtreeWalker(const Tree& tree, const Root& root, const WalkOptions& options, std::uint64_t largest_subtree);

  /// Goes to a node by eliminating its path. False when it is inseparable: its parent counts it with all below.
  bool enter(std::span<const std::size_t> path);
  /// Scores the children of the entered node and all below them, and the empty candidate when the node is the root.
  void walk();

  std::uint64_t n_scored() const { return n_scored_; }
  std::uint64_t n_inseparable() const { return n_inseparable_; }
  /// True when anything was left undone because a stop was requested.
  bool stopped() const { return stopped_; }
  const BestList& list(std::size_t rule, std::size_t response) const {
    return lists_[rule * tree_.n_responses() + response];
  }

 private:
  /// A rule with its factors exp(penalty[k] / n).
  struct Criterion {
    Score score;
    std::vector<double> factor;
  };

  void visit(std::size_t depth, std::size_t open);
  void score_children(std::size_t depth, std::size_t open);
  void score_wide_form(std::size_t depth, const TreeForm& form);
  void account(std::size_t depth, std::size_t first_form, std::size_t last_form);
  void offer_children(std::size_t depth, std::size_t first_form, std::size_t last_form);
  void score_empty();
  bool descend(std::size_t depth, std::size_t form);
  bool eliminate(std::size_t depth, const TreeForm& form, std::size_t fold);

  double score_of(const Criterion& criterion, double cv_sse, double rss, std::size_t n_columns) const;
  void offer(BestList& list, double score, double cv_sse, double rss, std::size_t n_columns, std::size_t n_terms);
  void count_scored(std::uint64_t n);
  void report_progress();
  const PartialGrams& grams(std::size_t depth) const { return depth == 0 ? root_.grams : levels_[depth - 1]; }

  const Tree& tree_;
  const Root& root_;
  const WalkOptions& options_;
  std::uint64_t largest_subtree_;
  std::vector<Criterion> criteria_;
  std::vector<BestList> lists_;  ///< [rule × response]

  std::vector<PartialGrams> levels_;                   ///< [depth − 1]; the root's are shared
  std::vector<std::vector<unsigned char>> separable_;  ///< [depth][form] whether a child may be entered
  std::vector<double> scratch_;
  ColumnScores scores_{};
  Multipliers multipliers_;
  PivotRows pivots_;

  std::size_t entered_depth_ = 0, entered_open_ = 0;
  Path path_;                           ///< [max_depth] forms picked
  std::vector<std::size_t> n_columns_;  ///< [max_depth + 1] design columns of the node at each depth
  std::vector<TermCode> terms_;         ///< scratch for offers

  std::uint64_t n_scored_ = 0;
  std::uint64_t n_unreported_ = 0;
  std::uint64_t n_inseparable_ = 0;
  bool stopped_ = false;
};

}  // namespace formsieve::plain

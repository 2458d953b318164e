// The tree of candidates in the order in which the walk visits them.
//
// A path picks predictors in descending visiting order, so that the columns still open at a node are always a prefix of
// the columns. A node is the set of forms on the path to it; every candidate is scored once, as a child of its node.
// Predictors that are always in stand last in visiting order, hence are picked first; among the others those with the
// widest forms come next, so that forms of many columns are eliminated near the root, and those with the most forms are
// left for the bottom, so that few nodes hold many candidates.
#pragma once

#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// One form of one predictor, as the walk meets it.
struct TreeForm {
  std::size_t predictor = 0;     ///< in plan order
  std::size_t position = 0;      ///< of the predictor in visiting order: what is open below a node that picks the form
  std::uint16_t choice = 1;      ///< 1 + form index in the space
  std::size_t first_column = 0;  ///< in visiting order
  std::size_t n_columns = 1;
};

/// The tree's shape. `open` counts the open predictors of a node: those before its last pick in visiting order.
class Tree {
 public:
  /// Subtree sizes saturate here: no walk visits a larger space.
  static constexpr std::uint64_t kMostCandidates = std::uint64_t{1} << 63;

  explicit Tree(const Space& space);

  std::size_t n_predictors() const { return form_start_.size() - 1; }
  std::size_t n_columns() const { return gram_column_.size(); }
  std::size_t n_responses() const { return n_responses_; }
  std::size_t n_always() const { return n_always_; }
  /// Most predictors on a path.
  std::size_t max_depth() const { return max_depth_; }
  /// Most columns of one form, at least 1.
  std::size_t widest_form() const { return widest_form_; }
  /// Most columns of one candidate.
  std::size_t most_columns() const { return most_columns_; }

  const std::vector<TreeForm>& forms() const { return forms_; }
  /// Forms of the first `open` predictors are forms()[0 … n_forms(open) − 1], their columns 0 … columns(open) − 1.
  std::size_t n_forms(std::size_t open) const { return form_start_[open]; }
  std::size_t columns(std::size_t open) const { return column_start_[open]; }
  /// Where each column in visiting order stands in the Gram.
  const std::vector<std::size_t>& gram_column() const { return gram_column_; }

  /// How many entries left of the diagonal a column's row needs: none with other forms of the same predictor, except
  /// that a form of several columns keeps all.
  const std::vector<std::size_t>& row_length() const { return row_length_; }
  /// Where each column's row starts in packed storage; [n_columns + 1].
  const std::vector<std::size_t>& row_offset() const { return row_offset_; }

  /// The first row that is needed in the matrices of a node at `depth`: all, unless its children have none of their
  /// own, when only forms of several columns need entries off the diagonal.
  std::size_t first_row(std::size_t depth) const { return depth + 1 < max_depth_ ? 0 : first_wide_column_; }

  /// True when every predictor that is always in is among the first `depth` picks.
  bool is_candidate(std::size_t depth) const { return depth >= n_always_; }
  /// The range of predictors [first, open) from which a node at `depth` may pick next.
  std::size_t first_pick(std::size_t depth, std::size_t open) const { return is_candidate(depth) ? 0 : open - 1; }
  /// True when something can be picked below such a node.
  bool has_children(std::size_t depth, std::size_t open) const { return depth < max_depth_ && open > 0; }
  /// Candidates of one response in the subtree of a node at `depth`, the node itself included; saturates at
  /// kMostCandidates.
  std::uint64_t size(std::size_t depth, std::size_t open) const;

 private:
  void arrange(const Space& space, std::span<const std::size_t> order);
  void count_subtrees();

  std::size_t n_responses_ = 1;
  std::size_t n_always_ = 0;
  std::size_t max_depth_ = 0;
  std::size_t widest_form_ = 1;
  std::size_t most_columns_ = 0;
  std::size_t first_wide_column_ = 0;  ///< no form of several columns starts before it
  bool possible_ = true;               ///< false when max_terms is below the number of predictors that are always in
  std::vector<TreeForm> forms_;
  std::vector<std::size_t> form_start_, column_start_;  ///< [n_predictors + 1]
  std::vector<std::size_t> gram_column_, row_length_, row_offset_;
  std::vector<std::vector<std::uint64_t>> size_;  ///< [picks left][open optional predictors]
};

/// a + b and a · b, at most kMostCandidates.
std::uint64_t saturating_add(std::uint64_t a, std::uint64_t b);
std::uint64_t saturating_multiply(std::uint64_t a, std::uint64_t b);

}  // namespace formsieve::plain

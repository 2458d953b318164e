// The Gram matrices of one node: what is left of the training matrices A and the validation matrices V of every fold,
// and of the matrix of all rows, after the node's columns have been eliminated, for the columns still open.
#pragma once

#include "base/gram.hpp"
#include "plain/tree.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// One symmetric matrix, open columns and responses, without the entries that no candidate needs: those between two
/// responses and most between two forms of the same predictor (Tree::row_length). A view.
struct Half {
  double* rows;       ///< packed rows left of the diagonal, Tree::row_offset
  double* diagonal;   ///< [n_columns]
  double* responses;  ///< [n_responses × stride] each response's entries with the columns
  double* own;        ///< [n_responses] each response's entry with itself
  std::size_t stride;
};

/// The matrices of one fold.
struct FoldGrams {
  Half training;
  Half validation;
};

/// All folds of one node, and after them "all rows", whose validation part stays unused. One allocation, sized for the
/// open columns of the node's depth; a node with fewer uses a prefix of every array. Memory: about n_folds · (open
/// columns)² numbers, or n_folds · open columns where the depth needs no rows (Tree::first_row).
class PartialGrams {
 public:
  /// Room for any node at `depth`. Unset values are NaN, so that a read of one would show.
  PartialGrams(const Tree& tree, std::size_t depth, std::size_t n_folds);
  PartialGrams(PartialGrams&&) = default;

  std::size_t n_folds() const { return folds_.size() - 1; }
  const FoldGrams& fold(std::size_t f) const { return folds_[f]; }
  const Half& all_rows() const { return folds_.back().training; }

 private:
  std::vector<double> values_;
  std::vector<FoldGrams> folds_;  ///< [n_folds + 1] views of values_
};

/// The root of the walk: the Gram matrices in visiting order and the smallest pivots allowed. Shared by all workers.
struct Root {
  Root(const Tree& tree, const base::GramSet& grams, double smallest_pivot_rel);

  std::size_t n_rows, n_folds;
  PartialGrams grams;
  /// [n_folds + 1][n_columns] a pivot must be greater than this: a share of the column's diagonal before any
  /// elimination.
  std::vector<std::vector<double>> smallest_pivot;
};

}  // namespace formsieve::plain

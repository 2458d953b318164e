// The matrices of one outer node: what is left of the training and validation matrices after its forms.
#pragma once

#include "base/gram.hpp"
#include "search/outer_tree.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::search {

/// Dense symmetric matrices of every fold, and of all rows after them, in the order of OuterTree::gram_column() with
/// the responses after the columns. A node uses the columns that are still open and the responses; the rest is stale.
class OuterGrams {
 public:
  OuterGrams(std::size_t n_columns, std::size_t n_responses, std::size_t n_folds);

  std::size_t n_columns() const { return n_columns_; }
  std::size_t n_responses() const { return n_responses_; }
  std::size_t n_folds() const { return n_folds_; }
  std::size_t order() const { return n_columns_ + n_responses_; }
  /// Fold n_folds() is that of all rows; it has no validation matrix.
  double* training(std::size_t fold) { return training_.data() + fold * order() * order(); }
  const double* training(std::size_t fold) const { return training_.data() + fold * order() * order(); }
  double* validation(std::size_t fold) { return validation_.data() + fold * order() * order(); }
  const double* validation(std::size_t fold) const { return validation_.data() + fold * order() * order(); }

  /// A response's held-out sum of squared errors over the folds, and its residual sum of squares.
  double cv_sse(std::size_t response) const;
  double rss(std::size_t response) const;

 private:
  std::size_t n_columns_, n_responses_, n_folds_;
  std::vector<double> training_, validation_;
};

/// The root: the Gram matrices in the outer order, for responses [first, first + n_responses).
OuterGrams outer_root(const OuterTree& tree, const base::GramSet& grams, std::size_t first_response,
                      std::size_t n_responses);

/// The smallest pivot of each column, a share of its diagonal at the root. [n_folds + 1][n_columns]
std::vector<std::vector<double>> smallest_pivots(const OuterGrams& root, double smallest_rel);

/// Brings a form into every fold: `child` is written for the columns before the form's first and the responses. False,
/// with the child unusable, when a pivot is not larger than the smallest allowed. `scratch`: [2 × order].
bool bring_in(const OuterForm& form, const OuterGrams& parent, OuterGrams& child,
              const std::vector<std::vector<double>>& smallest, std::vector<double>& scratch);

}  // namespace formsieve::search

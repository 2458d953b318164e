// Bringing in a form of several columns, one after another. The rows of its columns are copied out, eliminated from
// each other, and then applied to whatever is open.
#pragma once

#include "plain/partial_grams.hpp"
#include "plain/tree.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// The pivot rows of one form in one fold. A row holds the entries with the first n_open columns, the responses, and
/// the form's own columns. Notation as in elimination_kernel.hpp.
class PivotRows {
 public:
  /// All memory is taken here.
  PivotRows(std::size_t most_open_columns, std::size_t n_responses, std::size_t most_pivots);

  /// Reads the rows of the form's columns and eliminates each from those after it. `validation` null for all rows.
  /// False when a pivot is not separable: the rows are then unusable. `smallest_pivot` is indexed by column.
  bool load(const Tree& tree, const TreeForm& form, std::size_t n_open, const Half& training, const Half* validation,
            const double* smallest_pivot);

  /// What the form adds to response r's own entry of A (never above zero) and of V.
  double training_change(std::size_t r) const;
  double validation_change(std::size_t r) const;

  /// Writes the child's matrices, parent minus the updates of every pivot, for the open columns (off the
  /// diagonal from row `first_row` on) and the responses.
  void apply_training(const Tree& tree, std::size_t first_row, const Half& parent, const Half& child) const;
  void apply_validation(const Tree& tree, std::size_t first_row, const Half& parent, const Half& child) const;

 private:
  void read(const Tree& tree, std::size_t first, const Half& half, std::vector<double>& rows) const;
  bool eliminate(const double* smallest_pivot, bool with_validation);
  const double* row(const std::vector<double>& rows, std::size_t p) const { return rows.data() + p * width_; }
  double* row(std::vector<double>& rows, std::size_t p) const { return rows.data() + p * width_; }

  std::size_t n_responses_;
  std::size_t n_open_ = 0, n_pivots_ = 0, width_ = 0;
  std::vector<double> a_, v_;  ///< pivot rows of A and V
  std::vector<double> m_, t_;  ///< their multipliers
};

}  // namespace formsieve::plain

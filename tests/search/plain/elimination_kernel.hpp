// The arithmetic of the walk on one fold. Nothing here allocates.
//
// With A, V the training and validation matrices of the head of walk.hpp, one more column c gives for response y
//     RSS      = A_yy − A_yc² / A_cc
//     held out = V_yy + m_y (m_y V_cc − 2 V_yc),   m = A_c· / A_cc
// and an elimination, with t = V_c· − ½ V_cc m, is the update A −= m A_c·, V −= m t + t m (outer products).
#pragma once

#include "plain/partial_grams.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::plain {

using namespace search;

/// Whether a pivot is large enough to be divided by. That of a column without spread is not: zero exceeds no share of
/// zero.
inline bool is_separable(double pivot, double smallest_pivot) { return pivot - smallest_pivot > 0.0; }

/// Scores of each column in [first, last) as the last column of a candidate. Arrays are indexed by column; those of a
/// column whose margin is not positive mean nothing.
struct ColumnScores {
  std::size_t first, last;
  std::size_t stride;  ///< between responses
  double* inverse;     ///< scratch
  double* margin;      ///< smallest difference of pivot and smallest allowed pivot over the matrices seen so far
  double* cv_sse;      ///< [n_responses × stride] sum over folds
  double* rss;         ///< [n_responses × stride]
};

void clear(const ColumnScores& scores, std::size_t n_responses);
/// Adds one fold's held-out sums of squares. `smallest_pivot` is indexed by column, here and below.
void add_fold(const FoldGrams& fold, const double* smallest_pivot, std::size_t n_responses, const ColumnScores& scores);
/// Sets the residual sums of squares from the matrix of all rows.
void set_rss(const Half& all, const double* smallest_pivot, std::size_t n_responses, const ColumnScores& scores);

/// Scratch of an elimination.
struct Multipliers {
  explicit Multipliers(std::size_t n_columns) : m(n_columns), t(n_columns) {}
  std::vector<double> m, t;  ///< [n_columns]
};

/// Brings the single column c into one fold: writes the child's matrices for the first `n_open` columns and the
/// responses, off the diagonal from row `first_row` on. The pivot must be separable.
void eliminate_fold(const Tree& tree, std::size_t c, std::size_t first_row, std::size_t n_open, const FoldGrams& parent,
                    const FoldGrams& child, Multipliers& multipliers);
/// The same for the matrix of all rows.
void eliminate_all_rows(const Tree& tree, std::size_t c, std::size_t first_row, std::size_t n_open, const Half& parent,
                        const Half& child, Multipliers& multipliers);

}  // namespace formsieve::plain

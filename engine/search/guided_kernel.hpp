// Kernels of the guided search: eliminations of one fold for many columns at once.
//
// Multiplications and additions of doubles only, never fused, column by column: the same bits on every instruction set.
#pragma once

#include <cstddef>

namespace formsieve::search {

/// Rows are padded with zeros to a multiple of this: four of the longest vectors, which hide each other's latency.
inline constexpr std::size_t kRowGrain = 32;

/// What of every open column c is left after the columns eliminated so far, [width] each.
struct OpenColumns {
  double* a_diagonal;  ///< A_cc
  double* v_diagonal;  ///< V_cc
  double* a_y;         ///< A_cy
  double* v_y;         ///< V_cy
};

/// Rows of earlier pivots as they were when eliminated, row j at j · width.
struct PivotRowsView {
  const double* a;
  const double* v;
  std::size_t n_rows;
  std::size_t width;
};

/// Reduces the rows a and v [width] of a column of the Gram matrices by the earlier pivots, in place:
///     a ← a − Σ l_j A_j,   v ← v − Σ (l_j V_j + h_j A_j)
void reduce_rows(const PivotRowsView& earlier, const double* l, const double* h, double* a, double* v);

/// The scalars of one elimination: 1/A_pp, V_pp, A_py/A_pp, and (V_py − (A_py/A_pp) V_pp)/A_pp.
struct PivotScalars {
  double inverse, v_pivot, m_y, h_y;
};

/// Takes a pivot, whose reduced rows are a and v [width], out of all open columns.
void eliminate_pivot(const PivotScalars& pivot, const double* a, const double* v, std::size_t width,
                     const OpenColumns& open);

/// Adds to each sum the fold's held-out SSE with that column brought in, `sse` being that without; +infinity where
/// A_cc is not above least[c].
void add_scores(const OpenColumns& open, const double* least, double sse, std::size_t width, double* sums);

/// Brings column c into two dense symmetric matrices (walk.hpp), stored by rows of `stride`, a multiple of kSmallGrain:
/// entries (i, j) with c < j ≤ i < order are right afterwards; others of these rows may hold anything. `scratch`:
/// [3 · stride].
inline constexpr std::size_t kSmallGrain = 8;
void eliminate_dense(double* a, double* v, std::size_t order, std::size_t stride, std::size_t c, double* scratch);

}  // namespace formsieve::search

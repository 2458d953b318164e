// Means and centred cross-products of sets of rows, and how those of two sets make those of their union.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::design {

/// Σ w, the weighted means, and Σ w (x − mean)(x − mean)ᵀ of a set of rows. Centred at every stage: no sum of squares
/// about zero is ever formed, so that nothing cancels when two sets are joined.
struct Moments {
  double weight = 0.0;
  std::vector<double> mean;   ///< [order]
  std::vector<double> cross;  ///< [order × order] column-major, symmetric

  std::size_t order() const { return mean.size(); }
};

/// Values of a few rows by column: column c of row i at values[c * kRowChunk + i].
struct RowBlock {
  std::size_t n_rows;  ///< at most base::kRowChunk
  std::size_t n_columns;
  const double* values;
};

/// Scratch of add_block.
struct BlockWorkspace {
  std::vector<double> panels, mean, cross;
};

/// Joins a block of rows to a set; `weights` is empty or holds the weight of each row. Of `set.cross` only the lower
/// triangle is kept up: mirror() after the last block. Cost n_rows · n_columns² / 2. The additions of an entry depend
/// on the rows alone, not on the columns beside it: see cross_product_kernel.hpp.
void add_block(Moments& set, const RowBlock& block, std::span<const double> weights, BlockWorkspace& workspace);

/// Copies the lower triangle of `cross` to the upper.
void mirror(Moments& set);

/// Moments of a block of rows.
Moments moments_of(const RowBlock& block, std::span<const double> weights, BlockWorkspace& workspace);

/// Moments of the union of two disjoint sets of rows (Chan, Golub & LeVeque 1983, eq. 2.1, for cross-products).
void join(Moments& set, const Moments& other);

/// Joins neighbours, then neighbours of those, and so on: the order of additions depends on the number of sets alone.
/// Empty when there are none.
Moments join_all(std::vector<Moments> sets);

/// `matrix` += factor · d dᵀ, both of order d.size().
void add_outer_product(std::vector<double>& matrix, double factor, std::span<const double> d);

}  // namespace formsieve::design

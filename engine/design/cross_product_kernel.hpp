// Cross-products of the columns of a block of rows.
//
// Why not a library's matrix product: it may cut the sum over rows where the caches of the machine suggest, and then
// the last bits of every score depend on the machine. Here each entry is one plain sum over the rows in their order.
// Speed comes from many entries at a time, which changes no sum: a tile of 4 × 4 entries is kept in registers while the
// rows go by, whatever the width of the vector registers.
#pragma once

#include <cstddef>

namespace formsieve::design {

/// Columns that lie together in memory, row by row.
inline constexpr std::size_t kPanelColumns = 4;

/// Size of the panels of a block.
std::size_t panels_size(std::size_t n_rows, std::size_t n_columns);

/// Copies columns (column c at columns + c · stride) into panels: row by row kPanelColumns at a time, padded by zeros.
void pack(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns, double* panels);

/// out[i + j · n_columns] = Σ over rows of column i times column j, for all i and j. Cost n_rows · n_columns² / 2.
void cross_products(const double* panels, std::size_t n_rows, std::size_t n_columns, double* out);

}  // namespace formsieve::design

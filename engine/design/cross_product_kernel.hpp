// Cross-products of the columns of a block of rows, for the best instruction set of the processor.
//
// Why not a library's matrix product: it may cut the sum over rows where the caches of the machine suggest, and then
// the last bits of every score depend on the machine. Here each entry is one sum over the rows in their order, with one
// fused multiplication and addition for each row; only instruction sets without it ("baseline") give other last bits.
// Speed comes from many entries at a time, which changes no sum: a tile of up to 24 × 8 entries is kept in registers
// while kTileRows rows go by, few enough for their columns to stay in the fastest cache.
#pragma once

#include <cstddef>

namespace formsieve::design {

/// Columns that lie together in memory, row by row.
inline constexpr std::size_t kPanelColumns = 8;

/// The number of columns rounded up to whole panels.
std::size_t padded(std::size_t n_columns);
/// Size of the panels of a block.
std::size_t panels_size(std::size_t n_rows, std::size_t n_columns);

/// Copies columns (column c at columns + c · stride) into panels, row by row kPanelColumns at a time, padded by zeros:
/// each less its mean, and each row times the square root of its weight. `weights`: [n_rows], or null; `total_weight`:
/// their sum, or n_rows; `means`: [padded(n_columns)], correct to a rounding or two.
void pack_centred(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns,
                  const double* weights, double total_weight, double* panels, double* means);

/// out[i + j · padded(n_columns)] = Σ over rows of column i times column j, for i ≥ j; out holds padded(n_columns)²
/// values, and what stands above the diagonal is anything. Cost n_rows · n_columns² / 2.
void cross_products(const double* panels, std::size_t n_rows, std::size_t n_columns, double* out);

}  // namespace formsieve::design

// Private to room fit: Householder QR by fixed blocks of rows, the kernel of the fast fits.
#pragma once

#include <cstddef>

namespace formsieve::fit {

/// Rows folded in at a time: a block of a dozen columns stays in the first-level cache. Fixed, so that the result does
/// not depend on the machine.
inline constexpr std::size_t kRowBlock = 256;
/// Distance between the columns of a block: not a power of two, or columns would fight for the same cache lines.
inline constexpr std::size_t kRowBlockStride = kRowBlock + 8;

/// Replaces the upper triangular R by that of the QR factorisation of [R; B], with one Householder reflection a column
/// that touches row j of R and the whole of B (Golub & Van Loan, Matrix Computations, chapter on modifying matrix
/// factorisations; from memory).
///   triangle  [m × m] column by column, R on entry and exit; nothing below its diagonal is read
///   block     columns of B, n_rows ≤ kRowBlock used of kRowBlockStride; overwritten
/// Starting from R = 0 and folding in all rows gives R of the whole. No allocation. Cost 2·n_rows·m² flops.
void fold_in_rows(double* triangle, double* block, std::size_t n_rows, std::size_t m);

/// The same for B an upper triangle [m × m] column by column, whose zeros are left alone; overwritten. Cost m³ flops.
void fold_in_triangle(double* triangle, double* other, std::size_t m);

}  // namespace formsieve::fit

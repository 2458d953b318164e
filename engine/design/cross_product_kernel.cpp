#include "design/cross_product_kernel.hpp"

#include <algorithm>

namespace formsieve::design {

namespace {

constexpr std::size_t kTile = kPanelColumns;

std::size_t n_panels(std::size_t n_columns) { return (n_columns + kTile - 1) / kTile; }

/// The products of one panel's columns with another's.
void multiply(const double* left, const double* right, std::size_t n_rows, double (&tile)[kTile][kTile]) {
  double sum[kTile][kTile] = {};
  for (std::size_t row = 0; row < n_rows; ++row, left += kTile, right += kTile)
    for (std::size_t i = 0; i < kTile; ++i)
      for (std::size_t j = 0; j < kTile; ++j) sum[i][j] += left[i] * right[j];
  for (std::size_t i = 0; i < kTile; ++i)
    for (std::size_t j = 0; j < kTile; ++j) tile[i][j] = sum[i][j];
}

}  // namespace

std::size_t panels_size(std::size_t n_rows, std::size_t n_columns) { return n_panels(n_columns) * n_rows * kTile; }

void pack(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns, double* panels) {
  std::fill(panels, panels + panels_size(n_rows, n_columns), 0.0);
  for (std::size_t c = 0; c < n_columns; ++c) {
    const double* column = columns + c * stride;
    double* out = panels + (c / kTile) * n_rows * kTile + c % kTile;
    for (std::size_t row = 0; row < n_rows; ++row) out[row * kTile] = column[row];
  }
}

void cross_products(const double* panels, std::size_t n_rows, std::size_t n_columns, double* out) {
  const std::size_t panel_size = n_rows * kTile;
  for (std::size_t p = 0; p < n_panels(n_columns); ++p) {
    for (std::size_t q = 0; q <= p; ++q) {
      double tile[kTile][kTile];
      multiply(panels + p * panel_size, panels + q * panel_size, n_rows, tile);
      const std::size_t n_i = std::min(kTile, n_columns - p * kTile);
      const std::size_t n_j = std::min(kTile, n_columns - q * kTile);
      for (std::size_t i = 0; i < n_i; ++i) {
        for (std::size_t j = 0; j < n_j; ++j) {
          const std::size_t row = p * kTile + i;
          const std::size_t column = q * kTile + j;
          out[row + column * n_columns] = out[column + row * n_columns] = tile[i][j];
        }
      }
    }
  }
}

}  // namespace formsieve::design

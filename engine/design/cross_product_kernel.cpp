#include "design/cross_product_kernel.hpp"

#include "base/simd_targets.hpp"

#include <algorithm>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "design/cross_product_kernel.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::design::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kPanelColumns>;
using Vector = hn::Vec<Tag>;

/// Rows that go by while a tile is kept in registers.
constexpr std::size_t kTileRows = 128;
constexpr std::size_t kLanes = HWY_MIN(kPanelColumns, HWY_MAX_BYTES / sizeof(double));
/// Vectors down and columns across a tile: as many sums as the registers hold beside the factors, and at least as many
/// as additions are in flight.
constexpr std::size_t kTileVectors = kLanes > 1 ? 3 : 4;
constexpr std::size_t kTileColumns = kLanes == 8 ? 8 : 4;

/// Where vector v of a row begins: vectors run through the panels, whose rows are kPanelColumns apart.
HWY_INLINE const double* vector_at(const double* panels, std::size_t panel_size, std::size_t v) {
  constexpr std::size_t kInPanel = kPanelColumns / kLanes;
  return panels + v / kInPanel * panel_size + v % kInPanel * kLanes;
}

/// Adds the products of kVectors vectors of columns, from vector v, with kTileColumns columns to sums that are `stride`
/// apart.
template <std::size_t kVectors>
HWY_INLINE void add_tile(const double* HWY_RESTRICT panels, std::size_t panel_size, std::size_t v,
                         const double* HWY_RESTRICT right, std::size_t n_rows, double* HWY_RESTRICT out,
                         std::size_t stride) {
  const Tag tag;
  const double* left[kVectors];
  for (std::size_t i = 0; i < kVectors; ++i) left[i] = vector_at(panels, panel_size, v + i);
  Vector sum[kTileColumns][kVectors];
  for (std::size_t j = 0; j < kTileColumns; ++j)
    for (std::size_t i = 0; i < kVectors; ++i) sum[j][i] = hn::LoadU(tag, out + j * stride + i * kLanes);
  for (std::size_t row = 0; row < n_rows; ++row) {
    Vector factor[kVectors];
    for (std::size_t i = 0; i < kVectors; ++i) factor[i] = hn::LoadU(tag, left[i] + row * kPanelColumns);
    for (std::size_t j = 0; j < kTileColumns; ++j) {
      const Vector other = hn::Set(tag, right[row * kPanelColumns + j]);
      for (std::size_t i = 0; i < kVectors; ++i) sum[j][i] = hn::MulAdd(factor[i], other, sum[j][i]);
    }
  }
  for (std::size_t j = 0; j < kTileColumns; ++j)
    for (std::size_t i = 0; i < kVectors; ++i) hn::StoreU(sum[j][i], tag, out + j * stride + i * kLanes);
}

/// Adds the products of some rows for one block of kTileColumns columns: entries from the block's own columns
/// downwards.
void add_columns(const double* panels, std::size_t panel_size, std::size_t n_rows, std::size_t first_column,
                 std::size_t stride, double* out) {
  const double* right = panels + first_column / kPanelColumns * panel_size + first_column % kPanelColumns;
  const std::size_t end = stride / kLanes;
  for (std::size_t v = first_column / kLanes; v < end;) {
    double* tile = out + first_column * stride + v * kLanes;
    const std::size_t n_left = end - v;
    if (n_left >= kTileVectors) {
      add_tile<kTileVectors>(panels, panel_size, v, right, n_rows, tile, stride);
      v += kTileVectors;
    } else if (n_left >= 2) {
      add_tile<2>(panels, panel_size, v, right, n_rows, tile, stride);
      v += 2;
    } else {
      add_tile<1>(panels, panel_size, v, right, n_rows, tile, stride);
      ++v;
    }
  }
}

void add_products(const double* panels, std::size_t n_rows, std::size_t n_columns, double* out) {
  const std::size_t stride = padded(n_columns);
  for (std::size_t first = 0; first < n_rows; first += kTileRows) {
    const std::size_t n = std::min(kTileRows, n_rows - first);
    for (std::size_t c = 0; c < n_columns; c += kTileColumns)
      add_columns(panels + first * kPanelColumns, n_rows * kPanelColumns, n, c, stride, out);
  }
}

#if HWY_TARGET == HWY_AVX3

/// Eight values of eight columns, from columns that are `stride` apart into rows that lie together.
HWY_INLINE void transpose(const double* HWY_RESTRICT columns, std::size_t stride, double* HWY_RESTRICT rows) {
  const Tag tag;
  Vector pairs[8];  // of columns 2k and 2k + 1: rows 0, 2, 4, 6 in [2k], rows 1, 3, 5, 7 in [2k + 1]
  for (std::size_t k = 0; k < 8; k += 2) {
    const Vector even = hn::LoadU(tag, columns + k * stride);
    const Vector odd = hn::LoadU(tag, columns + (k + 1) * stride);
    pairs[k] = hn::InterleaveLower(tag, even, odd);
    pairs[k + 1] = hn::InterleaveUpper(tag, even, odd);
  }
  Vector fours[8];  // of columns 4h … 4h + 3: rows r and r + 4 in [4h + r]
  for (std::size_t h = 0; h < 8; h += 4) {
    for (std::size_t r = 0; r < 2; ++r) {
      const Vector left = pairs[h + r];
      const Vector right = pairs[h + 2 + r];
      fours[h + r] = hn::OddEvenBlocks(hn::SwapAdjacentBlocks(right), left);
      fours[h + 2 + r] = hn::OddEvenBlocks(right, hn::SwapAdjacentBlocks(left));
    }
  }
  for (std::size_t r = 0; r < 4; ++r) {
    hn::StoreU(hn::ConcatLowerLower(tag, fours[4 + r], fours[r]), tag, rows + r * 8);
    hn::StoreU(hn::ConcatUpperUpper(tag, fours[4 + r], fours[r]), tag, rows + (r + 4) * 8);
  }
}

#else

HWY_INLINE void transpose(const double* HWY_RESTRICT columns, std::size_t stride, double* HWY_RESTRICT rows) {
  for (std::size_t row = 0; row < kPanelColumns; ++row)
    for (std::size_t c = 0; c < kPanelColumns; ++c) rows[row * kPanelColumns + c] = columns[c * stride + row];
}

#endif

/// Row by row into one panel.
void pack(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns, double* panel) {
  std::size_t done = 0;
  if (n_columns == kPanelColumns)
    for (; done + kPanelColumns <= n_rows; done += kPanelColumns)
      transpose(columns + done, stride, panel + done * kPanelColumns);
  for (std::size_t row = done; row < n_rows; ++row)
    for (std::size_t c = 0; c < kPanelColumns; ++c)
      panel[row * kPanelColumns + c] = c < n_columns ? columns[c * stride + row] : 0.0;
}

/// Calls body(row, sum) for every row, with four sums that take the rows in turn, so that additions need not wait for
/// each other; returns their total.
template <class Body>
HWY_INLINE Vector sum_in_turns(std::size_t n_rows, const Body& body) {
  const Tag tag;
  Vector sum0 = hn::Zero(tag);
  Vector sum1 = hn::Zero(tag);
  Vector sum2 = hn::Zero(tag);
  Vector sum3 = hn::Zero(tag);
  std::size_t row = 0;
  for (; row + 4 <= n_rows; row += 4) {
    sum0 = body(row, sum0);
    sum1 = body(row + 1, sum1);
    sum2 = body(row + 2, sum2);
    sum3 = body(row + 3, sum3);
  }
  for (; row < n_rows; ++row) sum0 = body(row, sum0);
  return hn::Add(hn::Add(sum0, sum1), hn::Add(sum2, sum3));
}

/// The mean twice: the second, of what the first left, takes out the roundings of its sum.
template <bool kWeighted>
HWY_INLINE void centre_columns(double* HWY_RESTRICT columns, std::size_t n_rows, const double* HWY_RESTRICT weights,
                               double total_weight, double* HWY_RESTRICT means) {
  const Tag tag;
  const auto add = [=](std::size_t row, Vector value, Vector sum) HWY_ATTR {
    return kWeighted ? hn::MulAdd(value, hn::Set(tag, weights[row]), sum) : hn::Add(sum, value);
  };
  const Vector values = sum_in_turns(n_rows, [=](std::size_t row, Vector sum) HWY_ATTR {
    return add(row, hn::LoadU(tag, columns + row * kPanelColumns), sum);
  });
  const Vector total = hn::Set(tag, total_weight);
  const Vector mean = hn::Div(values, total);
  const Vector left = sum_in_turns(n_rows, [=](std::size_t row, Vector sum) HWY_ATTR {
    double* at = columns + row * kPanelColumns;
    const Vector value = hn::Sub(hn::LoadU(tag, at), mean);
    hn::StoreU(kWeighted ? hn::Mul(value, hn::Sqrt(hn::Set(tag, weights[row]))) : value, tag, at);
    return add(row, value, sum);
  });
  hn::StoreU(hn::Add(mean, hn::Div(left, total)), tag, means);
}

void pack_panel(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns,
                const double* weights, double total_weight, double* panel, double* means) {
  pack(columns, stride, n_rows, n_columns, panel);
  for (std::size_t c = 0; c < kPanelColumns; c += kLanes) {
    if (weights != nullptr)
      centre_columns<true>(panel + c, n_rows, weights, total_weight, means + c);
    else
      centre_columns<false>(panel + c, n_rows, weights, total_weight, means + c);
  }
}

}  // namespace formsieve::design::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::design {

HWY_EXPORT(add_products);
HWY_EXPORT(pack_panel);

std::size_t padded(std::size_t n_columns) { return (n_columns + kPanelColumns - 1) / kPanelColumns * kPanelColumns; }

std::size_t panels_size(std::size_t n_rows, std::size_t n_columns) { return padded(n_columns) * n_rows; }

void pack_centred(const double* columns, std::size_t stride, std::size_t n_rows, std::size_t n_columns,
                  const double* weights, double total_weight, double* panels, double* means) {
  for (std::size_t c = 0; c < n_columns; c += kPanelColumns) HWY_DYNAMIC_DISPATCH(pack_panel)
  (columns + c * stride, stride, n_rows, std::min(kPanelColumns, n_columns - c), weights, total_weight,
   panels + c * n_rows, means + c);
}

void cross_products(const double* panels, std::size_t n_rows, std::size_t n_columns, double* out) {
  std::fill_n(out, padded(n_columns) * padded(n_columns), 0.0);
  HWY_DYNAMIC_DISPATCH(add_products)(panels, n_rows, n_columns, out);
}

}  // namespace formsieve::design
#endif

#include "proof/dense_kernel.hpp"

#include "base/simd_targets.hpp"

#include <algorithm>
#include <cmath>
#include <type_traits>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "proof/dense_kernel.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::proof::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kLineLanes>;
using Vector = hn::Vec<Tag>;

constexpr std::size_t kLanes = HWY_MIN(kLineLanes, HWY_MAX_BYTES / sizeof(double));
/// Vectors down and columns across a tile: as many sums as the registers hold beside the factors.
constexpr std::size_t kTileVectors = kLanes > 1 ? 3 : 4;
constexpr std::size_t kColumns = kLanes == 8 ? 8 : 4;
constexpr std::size_t kDiagonalVectors = kColumns / kLanes;  // the rows of a diagonal block

/// The vectors of a tile, [column][vector].
template <std::size_t kVectors>
struct Tile {
  Vector sum[kColumns][kVectors];
};

template <std::size_t kVectors>
HWY_INLINE void load(const double* HWY_RESTRICT from, std::size_t stride, Tile<kVectors>& tile) {
  for (std::size_t j = 0; j < kColumns; ++j)
    for (std::size_t i = 0; i < kVectors; ++i) tile.sum[j][i] = hn::LoadU(Tag(), from + j * stride + i * kLanes);
}

template <std::size_t kVectors>
HWY_INLINE void store(const Tile<kVectors>& tile, std::size_t stride, double* HWY_RESTRICT to) {
  for (std::size_t j = 0; j < kColumns; ++j)
    for (std::size_t i = 0; i < kVectors; ++i) hn::StoreU(tile.sum[j][i], Tag(), to + j * stride + i * kLanes);
}

/// tile ± Σ_k left(·, k) right(·, k), n columns of both, their columns `stride` apart.
template <bool kSubtract, std::size_t kVectors>
HWY_INLINE void add_products(const double* HWY_RESTRICT left, const double* HWY_RESTRICT right, std::size_t stride,
                             std::size_t n, Tile<kVectors>& tile) {
  const Tag tag;
  for (std::size_t k = 0; k < n; ++k, left += stride, right += stride) {
    Vector factor[kVectors];
    for (std::size_t i = 0; i < kVectors; ++i) factor[i] = hn::LoadU(tag, left + i * kLanes);
    for (std::size_t j = 0; j < kColumns; ++j) {
      const Vector other = hn::Set(tag, right[j]);
      for (std::size_t i = 0; i < kVectors; ++i)
        tile.sum[j][i] =
            kSubtract ? hn::NegMulAdd(factor[i], other, tile.sum[j][i]) : hn::MulAdd(factor[i], other, tile.sum[j][i]);
    }
  }
}

/// tile ← tile L⁻ᵀ with L the block on the diagonal and 1 / its diagonal.
template <std::size_t kVectors>
HWY_INLINE void solve_tile(const double* HWY_RESTRICT diagonal, std::size_t stride,
                           const double* HWY_RESTRICT reciprocals, Tile<kVectors>& tile) {
  const Tag tag;
  for (std::size_t j = 0; j < kColumns; ++j) {
    const Vector reciprocal = hn::Set(tag, reciprocals[j]);
    for (std::size_t i = 0; i < kVectors; ++i) tile.sum[j][i] = hn::Mul(tile.sum[j][i], reciprocal);
    for (std::size_t l = j + 1; l < kColumns; ++l) {
      const Vector entry = hn::Set(tag, diagonal[j * stride + l]);
      for (std::size_t i = 0; i < kVectors; ++i) tile.sum[l][i] = hn::NegMulAdd(tile.sum[j][i], entry, tile.sum[l][i]);
    }
  }
}

/// Calls body(row, number of vectors as a type) for tiles that cover the rows from `row` to `end`.
template <class Body>
HWY_INLINE void for_tiles(std::size_t row, std::size_t end, const Body& body) {
  for (; row + kTileVectors * kLanes <= end; row += kTileVectors * kLanes)
    body(row, std::integral_constant<std::size_t, kTileVectors>());
  for (; row + 2 * kLanes <= end; row += 2 * kLanes) body(row, std::integral_constant<std::size_t, 2>());
  for (; row < end; row += kLanes) body(row, std::integral_constant<std::size_t, 1>());
}

/// Cholesky's method within a block on the diagonal; also 1 / its diagonal.
HWY_INLINE bool factor_diagonal(double* HWY_RESTRICT block, std::size_t stride, double* HWY_RESTRICT reciprocals) {
  for (std::size_t j = 0; j < kColumns; ++j) {
    const double pivot = block[j * stride + j];
    if (!(pivot > 0.0)) return false;
    const double root = std::sqrt(pivot);
    block[j * stride + j] = root;
    reciprocals[j] = 1.0 / root;
    for (std::size_t i = j + 1; i < kColumns; ++i) block[j * stride + i] *= reciprocals[j];
    for (std::size_t l = j + 1; l < kColumns; ++l)
      for (std::size_t i = l; i < kColumns; ++i) block[l * stride + i] -= block[j * stride + i] * block[j * stride + l];
  }
  return true;
}

bool factor(double* matrix, std::size_t order, std::size_t stride) {
  double reciprocals[kColumns];
  for (std::size_t first = 0; first < order; first += kColumns) {
    double* const panel = matrix + first * stride;
    const auto updated = [&](std::size_t row, auto& tile) HWY_ATTR {
      load(panel + row, stride, tile);
      add_products<true>(matrix + row, matrix + first, stride, first, tile);
    };
    Tile<kDiagonalVectors> diagonal;
    updated(first, diagonal);
    store(diagonal, stride, panel + first);
    if (!factor_diagonal(panel + first, stride, reciprocals)) return false;
    for_tiles(first + kColumns, order, [&](std::size_t row, auto vectors) HWY_ATTR {
      Tile<decltype(vectors)::value> tile;
      updated(row, tile);
      solve_tile(panel + first, stride, reciprocals, tile);
      store(tile, stride, panel + row);
    });
  }
  return true;
}

/// work ← L⁻ᵀ, all zero at first.
void invert_triangle(const double* lower, std::size_t order, std::size_t stride, double* work) {
  double reciprocals[kColumns];
  for (std::size_t first = 0; first < order; first += kColumns) {
    const double* const diagonal = lower + first * stride + first;
    for (std::size_t j = 0; j < kColumns; ++j) {
      reciprocals[j] = 1.0 / diagonal[j * stride + j];
      work[(first + j) * stride + first + j] = 1.0;
    }
    for_tiles(0, first + kColumns, [&](std::size_t row, auto vectors) HWY_ATTR {
      Tile<decltype(vectors)::value> tile;
      load(work + first * stride + row, stride, tile);
      if (row < first)  // column k of L⁻ᵀ is zero below row k
        add_products<true>(work + row * stride + row, lower + row * stride + first, stride, first - row, tile);
      solve_tile(diagonal, stride, reciprocals, tile);
      store(tile, stride, work + first * stride + row);
    });
  }
}

/// inverse ← L⁻ᵀ times its transpose, the lower triangle.
void multiply_triangles(const double* work, std::size_t order, std::size_t stride, double* inverse) {
  for (std::size_t first = 0; first < order; first += kColumns)
    for_tiles(first, order, [&](std::size_t row, auto vectors) HWY_ATTR {
      Tile<decltype(vectors)::value> tile;
      for (auto& column : tile.sum)
        for (Vector& sum : column) sum = hn::Zero(Tag());
      add_products<false>(work + row * stride + row, work + row * stride + first, stride, order - row, tile);
      store(tile, stride, inverse + first * stride + row);
    });
}

void invert(const double* lower, std::size_t order, std::size_t stride, double* work, double* inverse) {
  invert_triangle(lower, order, stride, work);
  multiply_triangles(work, order, stride, inverse);
}

void forward(const double* lower, std::size_t order, std::size_t stride, double* HWY_RESTRICT x) {
  const Tag tag;
  for (std::size_t first = 0; first < order; first += kColumns) {
    const double* const panel = lower + first * stride;
    Vector solved[kColumns];
    for (std::size_t j = 0; j < kColumns; ++j) {
      const double* const column = panel + j * stride + first;
      x[first + j] /= column[j];
      for (std::size_t i = j + 1; i < kColumns; ++i) x[first + i] -= column[i] * x[first + j];
      solved[j] = hn::Set(tag, x[first + j]);
    }
    for (std::size_t row = first + kColumns; row < order; row += kLanes) {
      Vector even = hn::LoadU(tag, x + row), odd = hn::Zero(tag);
      for (std::size_t j = 0; j < kColumns; j += 2) {
        even = hn::NegMulAdd(hn::LoadU(tag, panel + j * stride + row), solved[j], even);
        odd = hn::NegMulAdd(hn::LoadU(tag, panel + (j + 1) * stride + row), solved[j + 1], odd);
      }
      hn::StoreU(hn::Add(even, odd), tag, x + row);
    }
  }
}

void backward(const double* lower, std::size_t order, std::size_t stride, double* HWY_RESTRICT x) {
  const Tag tag;
  for (std::size_t end = order; end > 0; end -= kColumns) {
    const std::size_t first = end - kColumns;
    const double* const panel = lower + first * stride;
    Vector sum[kColumns];
    for (Vector& each : sum) each = hn::Zero(tag);
    for (std::size_t row = end; row < order; row += kLanes) {
      const Vector solved = hn::LoadU(tag, x + row);
      for (std::size_t j = 0; j < kColumns; ++j)
        sum[j] = hn::MulAdd(hn::LoadU(tag, panel + j * stride + row), solved, sum[j]);
    }
    for (std::size_t j = kColumns; j-- > 0;) {
      const double* const column = panel + j * stride + first;
      double rest = x[first + j] - hn::GetLane(hn::SumOfLanes(tag, sum[j]));
      for (std::size_t i = j + 1; i < kColumns; ++i) rest -= column[i] * x[first + i];
      x[first + j] = rest / column[j];
    }
  }
}

}  // namespace formsieve::proof::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::proof {

HWY_EXPORT(factor);
HWY_EXPORT(invert);
HWY_EXPORT(forward);
HWY_EXPORT(backward);

void PaddedMatrix::reset(std::size_t order) {
  const std::size_t lines = (order + kLineLanes - 1) / kLineLanes;
  order_ = order;
  padded_ = lines * kLineLanes;
  stride_ = (lines | 1) * kLineLanes;
  lines_.assign((lines | 1) * padded_, Line());
  for (std::size_t i = order; i < padded_; ++i) column(i)[i] = 1.0;
}

void PaddedMatrix::set_lower(const Eigen::MatrixXd& matrix) {
  const auto n = static_cast<std::size_t>(matrix.rows());
  if (n != order_) reset(n);
  for (std::size_t i = 0; i < n; ++i) {
    const double* const from = matrix.data() + i * n;
    std::copy(from + i, from + n, column(i) + i);
    std::fill(column(i) + n, column(i) + padded_, 0.0);
  }
  for (std::size_t i = n; i < padded_; ++i)
    for (std::size_t row = i; row < padded_; ++row) column(i)[row] = row == i ? 1.0 : 0.0;
}

bool factor_lower(PaddedMatrix& matrix) {
  return HWY_DYNAMIC_DISPATCH(factor)(matrix.data(), matrix.padded_order(), matrix.stride());
}

void solve_lower(const PaddedMatrix& lower, double* x) {
  HWY_DYNAMIC_DISPATCH(forward)(lower.data(), lower.padded_order(), lower.stride(), x);
}

void solve_transposed(const PaddedMatrix& lower, double* x) {
  HWY_DYNAMIC_DISPATCH(backward)(lower.data(), lower.padded_order(), lower.stride(), x);
}

void invert_factored(const PaddedMatrix& lower, PaddedMatrix& work, PaddedMatrix& inverse) {
  work.reset(lower.order());
  if (inverse.order() != lower.order()) inverse.reset(lower.order());
  HWY_DYNAMIC_DISPATCH(invert)(lower.data(), lower.padded_order(), lower.stride(), work.data(), inverse.data());
}

}  // namespace formsieve::proof
#endif

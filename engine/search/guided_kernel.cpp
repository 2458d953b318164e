#include "search/guided_kernel.hpp"

#include "base/simd_targets.hpp"

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "search/guided_kernel.cpp"
#include "hwy/foreach_target.h"
#include "hwy/highway.h"

#include <algorithm>
#include <limits>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

namespace hn = hwy::HWY_NAMESPACE;
using Tag = hn::CappedTag<double, 8>;
using Vector = hn::Vec<Tag>;
constexpr Tag kTag;
constexpr std::size_t kLanes = hn::MaxLanes(kTag);
/// Vectors of each row that stay in registers while the earlier rows go by.
constexpr std::size_t kBlock = 4;
static_assert(kSmallGrain % kLanes == 0);
static_assert(kRowGrain % (kBlock * kLanes) == 0);

void reduce_rows_here(const PivotRowsView& earlier, const double* l, const double* h, double* a, double* v) {
  const std::size_t width = earlier.width;
  for (std::size_t c = 0; c < width; c += kBlock * kLanes) {
    Vector a_sum[kBlock], v_sum[kBlock];
    for (std::size_t b = 0; b < kBlock; ++b) {
      a_sum[b] = hn::LoadU(kTag, a + c + b * kLanes);
      v_sum[b] = hn::LoadU(kTag, v + c + b * kLanes);
    }
    for (std::size_t j = 0; j < earlier.n_rows; ++j) {
      const Vector l_j = hn::Set(kTag, l[j]);
      const Vector h_j = hn::Set(kTag, h[j]);
      for (std::size_t b = 0; b < kBlock; ++b) {
        const Vector a_j = hn::LoadU(kTag, earlier.a + j * width + c + b * kLanes);
        const Vector v_j = hn::LoadU(kTag, earlier.v + j * width + c + b * kLanes);
        a_sum[b] = hn::Sub(a_sum[b], hn::Mul(l_j, a_j));
        v_sum[b] = hn::Sub(v_sum[b], hn::Add(hn::Mul(l_j, v_j), hn::Mul(h_j, a_j)));
      }
    }
    for (std::size_t b = 0; b < kBlock; ++b) {
      hn::StoreU(a_sum[b], kTag, a + c + b * kLanes);
      hn::StoreU(v_sum[b], kTag, v + c + b * kLanes);
    }
  }
}

void eliminate_pivot_here(const PivotScalars& pivot, const double* a, const double* v, std::size_t width,
                          const OpenColumns& open) {
  const Vector inverse = hn::Set(kTag, pivot.inverse);
  const Vector v_pivot = hn::Set(kTag, pivot.v_pivot);
  const Vector m_y = hn::Set(kTag, pivot.m_y);
  const Vector h_y = hn::Set(kTag, pivot.h_y);
  for (std::size_t c = 0; c < width; c += kLanes) {
    const Vector a_c = hn::LoadU(kTag, a + c);
    const Vector v_c = hn::LoadU(kTag, v + c);
    const Vector m = hn::Mul(a_c, inverse);
    const Vector v_left = hn::Sub(hn::Add(v_c, v_c), hn::Mul(m, v_pivot));
    const auto subtract = [&](double* from, Vector what) {
      hn::StoreU(hn::Sub(hn::LoadU(kTag, from + c), what), kTag, from + c);
    };
    subtract(open.a_diagonal, hn::Mul(m, a_c));
    subtract(open.v_diagonal, hn::Mul(m, v_left));
    subtract(open.a_y, hn::Mul(m_y, a_c));
    subtract(open.v_y, hn::Add(hn::Mul(m_y, v_c), hn::Mul(h_y, a_c)));
  }
}

void add_scores_here(const OpenColumns& open, const double* least, double sse, std::size_t width, double* sums) {
  const Vector sse_without = hn::Set(kTag, sse);
  const Vector infinity = hn::Set(kTag, std::numeric_limits<double>::infinity());
  for (std::size_t c = 0; c < width; c += kLanes) {
    const Vector a_cc = hn::LoadU(kTag, open.a_diagonal + c);
    const Vector v_y = hn::LoadU(kTag, open.v_y + c);
    const Vector m = hn::Div(hn::LoadU(kTag, open.a_y + c), a_cc);
    const Vector gain = hn::Mul(m, hn::Sub(hn::Add(v_y, v_y), hn::Mul(m, hn::LoadU(kTag, open.v_diagonal + c))));
    const auto separable = hn::Gt(a_cc, hn::LoadU(kTag, least + c));
    const Vector score = hn::IfThenElse(separable, hn::Sub(sse_without, gain), infinity);
    hn::StoreU(hn::Add(hn::LoadU(kTag, sums + c), score), kTag, sums + c);
  }
}

void eliminate_dense_here(double* a, double* v, std::size_t order, std::size_t stride, std::size_t c, double* scratch) {
  double* const m = scratch;
  double* const a_column = scratch + stride;
  double* const v_column = scratch + 2 * stride;
  std::fill_n(scratch, 3 * stride, 0.0);
  const double pivot = a[c * stride + c];
  const double v_pivot = v[c * stride + c];
  for (std::size_t i = c + 1; i < order; ++i) {
    a_column[i] = a[i * stride + c];
    v_column[i] = v[i * stride + c];
    m[i] = a_column[i] / pivot;
  }
  const std::size_t first = (c + 1) / kLanes * kLanes;  // m is 0 up to c
  for (std::size_t i = c + 1; i < order; ++i) {
    const Vector a_i = hn::Set(kTag, a_column[i]);
    const Vector m_i = hn::Set(kTag, m[i]);
    const Vector v_i = hn::Set(kTag, v_column[i] - m[i] * v_pivot);
    for (std::size_t j = first; j <= i; j += kLanes) {
      const Vector m_j = hn::LoadU(kTag, m + j);
      double* const a_ij = a + i * stride + j;
      double* const v_ij = v + i * stride + j;
      hn::StoreU(hn::Sub(hn::LoadU(kTag, a_ij), hn::Mul(a_i, m_j)), kTag, a_ij);
      const Vector change = hn::Add(hn::Mul(v_i, m_j), hn::Mul(m_i, hn::LoadU(kTag, v_column + j)));
      hn::StoreU(hn::Sub(hn::LoadU(kTag, v_ij), change), kTag, v_ij);
    }
  }
}

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE

namespace formsieve::search {

HWY_EXPORT(reduce_rows_here);
HWY_EXPORT(eliminate_pivot_here);
HWY_EXPORT(add_scores_here);
HWY_EXPORT(eliminate_dense_here);

void reduce_rows(const PivotRowsView& earlier, const double* l, const double* h, double* a, double* v) {
  HWY_DYNAMIC_DISPATCH(reduce_rows_here)(earlier, l, h, a, v);
}
void eliminate_pivot(const PivotScalars& pivot, const double* a, const double* v, std::size_t width,
                     const OpenColumns& open) {
  HWY_DYNAMIC_DISPATCH(eliminate_pivot_here)(pivot, a, v, width, open);
}
void add_scores(const OpenColumns& open, const double* least, double sse, std::size_t width, double* sums) {
  HWY_DYNAMIC_DISPATCH(add_scores_here)(open, least, sse, width, sums);
}
void eliminate_dense(double* a, double* v, std::size_t order, std::size_t stride, std::size_t c, double* scratch) {
  HWY_DYNAMIC_DISPATCH(eliminate_dense_here)(a, v, order, stride, c, scratch);
}

}  // namespace formsieve::search

#endif

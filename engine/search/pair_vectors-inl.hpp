// Vectors of the pair kernel: loads and stores, masks, and where a node keeps its numbers.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_VECTORS_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_VECTORS_HPP
#undef FORMSIEVE_PAIR_VECTORS_HPP
#else
#define FORMSIEVE_PAIR_VECTORS_HPP
#endif

#include "hwy/highway.h"
#include "search/pair_kernel.hpp"

#include <cstddef>
#include <limits>
#include <type_traits>
#include <utility>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kLanes>;
using Vector = hn::Vec<Tag>;
constexpr Tag kTag;
constexpr std::size_t kWidth = hn::MaxLanes(kTag);
constexpr double kInfinity = std::numeric_limits<double>::infinity();

HWY_INLINE Vector load(const double* p) { return hn::LoadU(kTag, p); }
HWY_INLINE void store(Vector v, double* p) { hn::StoreU(v, kTag, p); }
HWY_INLINE Vector all(double x) { return hn::Set(kTag, x); }
/// The smaller one; the second where the first is not a number, as after a division by a pivot of zero. What has such a
/// pivot is set aside by the pivot itself, so its figures must only not hide others.
HWY_INLINE Vector smaller(Vector maybe_not_a_number, Vector number) { return hn::Min(maybe_not_a_number, number); }
HWY_INLINE void lower(double* cell, Vector v) { store(smaller(v, load(cell)), cell); }
HWY_INLINE void increase(double* cell, Vector v) { store(hn::Add(load(cell), v), cell); }

/// Whole vectors of kLanes numbers, of which narrower instruction sets use the first kWidth only.
constexpr std::size_t kCell = kLanes;

std::size_t node_cell(const PairWork& w, std::size_t level, std::size_t r) {
  return (level * w.n_responses + r) * kCell;
}
std::size_t group_cell(const PairWork& w, std::size_t level, std::size_t predictor, std::size_t r) {
  return ((level * w.shape->n_predictors() + predictor) * w.n_responses + r) * kCell;
}
std::size_t column_cell(const PairWork& w, std::size_t r, std::size_t lane) {
  return (r * w.shape->n_lanes() + lane) * kCell;
}
std::size_t absent_cell(const PairWork& w, std::size_t r, std::size_t predictor) {
  return (r * w.shape->n_predictors() + predictor) * kCell;
}
std::size_t picks_cell(const PairWork& w, std::size_t r, std::size_t picks) {
  return (r * (w.shape->most_picks + 1) + picks) * kCell;
}
std::size_t lane_cell(const PairWork& w, std::size_t r, std::size_t lane) {
  return r * padded(w.shape->n_lanes()) + lane;
}

/// What was stored before is read from memory after it: the compiler would otherwise pick single lanes out of vector
/// registers, by permutations that take the multipliers' place, where a broadcasting load costs nothing.
HWY_INLINE void settle(const void* memory) { asm volatile("" : : "r"(memory) : "memory"); }

/// 1 / d, within two units of the last place.
HWY_INLINE Vector reciprocal(Vector d) {
#if HWY_TARGET == HWY_AVX3
  // 14 bits, then one step of third order: the divider would take twice as long
  const Vector x{_mm512_rcp14_pd(d.raw)};
  const Vector e = hn::NegMulAdd(d, x, all(1.0));
  return hn::MulAdd(x, hn::MulAdd(e, e, e), x);
#else
  return hn::Div(all(1.0), d);
#endif
}

template <class Mask>
HWY_INLINE unsigned bits_of(Mask mask) {
  uint8_t bits[8] = {};
  hn::StoreMaskBits(kTag, mask, bits);
  return bits[0];
}
HWY_INLINE auto mask_of(unsigned bits) {
  const uint8_t bytes[8] = {static_cast<uint8_t>(bits)};
  return hn::LoadMaskBits(kTag, bytes);
}

HWY_INLINE Vector at_least_zero(Vector v) { return hn::Max(v, hn::Zero(kTag)); }

/// Where a lane stands in a row: eight numbers of A, then eight of U, and so on.
HWY_INLINE std::size_t in_row(std::size_t lane) {
  if constexpr (kWidth == kLanes) return 2 * lane;  // only ever a multiple of kLanes
  return lane / kLanes * (2 * kLanes) + lane % kLanes;
}

/// Calls body(integral_constant i) for i = 0 … N − 1, so that arrays indexed by i can live in registers.
template <std::size_t N, class Body>
HWY_INLINE void unrolled(const Body& body) {
  [&]<std::size_t... kIndex>(std::index_sequence<kIndex...>) __attribute__((always_inline)) {
    (body(std::integral_constant<std::size_t, kIndex>()), ...);
  }
  (std::make_index_sequence<N>());
}

/// One number of each response, `stride` apart.
struct RowValues {
  const double* first;
  std::size_t stride;
  HWY_INLINE Vector operator()(std::size_t r) const { return all(first[r * stride]); }
};

HWY_INLINE unsigned first_bits(std::size_t n) { return n >= kWidth ? (1U << kWidth) - 1 : (1U << n) - 1; }

/// Which lanes from `lane` on are columns of predictors below `predictor`.
HWY_INLINE unsigned inside_bits(const PairShape& shape, std::size_t predictor, std::size_t lane) {
  unsigned bits = first_bits(shape.first_lane[predictor] - lane);
  // padding lanes stand between the first predictor's columns and the second's
  if (lane < shape.first_lane[1]) {
    const std::size_t of_first = shape.n_columns[1];
    bits &= ~first_bits(shape.first_lane[1] - lane) | (lane < of_first ? first_bits(of_first - lane) : 0U);
  }
  return bits;
}

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

#include "search/pair_kernel.hpp"

#include "base/simd_targets.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <type_traits>
#include <utility>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "search/pair_kernel.cpp"
#include "hwy/foreach_target.h"
#include "hwy/highway.h"

#include "hwy/contrib/math/math-inl.h"

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kLanes>;
using Vector = hn::Vec<Tag>;
constexpr Tag kTag;
constexpr std::size_t kWidth = hn::MaxLanes(kTag);
constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// Candidates between two calls of PairSink::tick.
constexpr std::uint64_t kTickCandidates = 500'000;
/// A weight above e^this makes the sums forget what is too small to matter and start from a new unit.
constexpr double kLargestLogWeight = 500.0;
/// A mean squared residual below this share of the response's variance is rounding: weights treat it as this much.
constexpr double kExactFit = 1e-28;
/// The smallest number whose exponential is one.
constexpr double kSmallestLogWeight = -700.0;

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

// ---- what one vector of scores means -------------------------------------------------------------------------------

/// The candidates of one vector: the path, a row's lane, and the lanes from `first_lane` on.
struct Place {
  std::size_t level;  ///< lanes on the path
  std::size_t row;    ///< PairSink::kNone for single columns
  std::size_t picks;  ///< of the candidate
  std::size_t node;   ///< whose tally they belong to
  std::size_t first_lane;
};

/// Starts the sums of a response afresh at a smaller unit.
HWY_NOINLINE void rescale_weights(PairWork& w, std::size_t r, double log_weight) {
  const PairShape& shape = *w.shape;
  w.weight_unit[r] *= std::exp(-log_weight / w.half_n);
  w.weight_limit[r] = w.weight_unit[r] * w.weight_range;
  const double factor = std::exp(-log_weight);
  const auto scale = [factor](double* p, std::size_t n) {
    for (std::size_t i = 0; i < n; ++i) p[i] *= factor;
  };
  scale(w.tally.weight_column + column_cell(w, r, 0), shape.n_lanes() * kCell);
  scale(w.tally.weight_lane + lane_cell(w, r, 0), padded(shape.n_lanes()));
  scale(w.tally.weight_picks + picks_cell(w, r, 0), (shape.most_picks + 1) * kCell);
  for (std::size_t level = 0; level <= shape.most_picks; ++level)
    scale(w.tally.weight_node + node_cell(w, level, r), kCell);
}

/// ln x. Where weights matter on a narrow range about 1, as with many rows, a short series of
/// 2 artanh((x − 1)/(x + 1)) keeps all the digits that half_n · ln x needs.
HWY_INLINE Vector logarithm(const PairWork& w, Vector x) {
  constexpr double kNarrow = 1.3;
  const bool narrow = w.weight_range < kNarrow && hn::AllTrue(kTag, hn::Gt(x, all(1.0 / kNarrow)));
  if (!narrow) return hn::Log(kTag, x);
  const Vector s = hn::Div(hn::Sub(x, all(1.0)), hn::Add(x, all(1.0)));
  const Vector q = hn::Mul(s, s);
  Vector series = all(2.0 / 11.0);
  for (const double term : {2.0 / 9.0, 2.0 / 7.0, 2.0 / 5.0, 2.0 / 3.0, 2.0}) series = hn::MulAdd(series, q, all(term));
  return hn::Mul(s, series);
}

HWY_NOINLINE void add_weights(PairWork& w, const Place& at, std::size_t r, Vector penalised) {
  const auto wanted = hn::Le(penalised, all(w.weight_limit[r]));
  const Vector floor = all(2.0 * kExactFit * w.half_n);
  const auto log_weight = [&] {
    // lanes beyond the limit are of no interest, and may be infinite
    const Vector x = hn::Div(hn::Max(hn::Min(penalised, all(w.weight_limit[r])), floor), all(w.weight_unit[r]));
    return hn::Mul(all(-w.half_n), logarithm(w, x));
  };
  Vector logs = log_weight();
  if (HWY_UNLIKELY(!hn::AllFalse(kTag, hn::Gt(logs, all(kLargestLogWeight))))) {
    HWY_ALIGN double lanes[kLanes];
    store(logs, lanes);
    rescale_weights(w, r, *std::max_element(lanes, lanes + kWidth));
    logs = log_weight();
  }
  const Vector weights = hn::IfThenElseZero(wanted, hn::Exp(kTag, hn::Max(logs, all(kSmallestLogWeight))));
  PairTally& t = w.tally;
  increase(t.weight_lane + lane_cell(w, r, at.first_lane), weights);
  increase(t.weight_picks + picks_cell(w, r, at.picks), weights);
  increase(t.weight_node + node_cell(w, at.node, r), weights);
  if (at.row != PairSink::kNone) increase(t.weight_column + column_cell(w, r, at.row), weights);
}

/// Shows lanes to the lists.
HWY_NOINLINE void offer(PairWork& w, const Place& at, std::size_t r, unsigned mask, Vector cv, Vector rss) {
  HWY_ALIGN double cv_lanes[kLanes];
  HWY_ALIGN double rss_lanes[kLanes];
  store(cv, cv_lanes);
  store(rss, rss_lanes);
  w.sink->offer(r, at.level, at.row, at.first_lane, mask, cv_lanes, rss_lanes);
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

/// Counts the lanes by bin, two at a time: one step of a table of pairs of bins, which close_histogram() adds up. Lanes
/// that are no candidates are infinite, hence in the last bin.
HWY_INLINE void count_in_histogram(PairWork& w, std::size_t r, Vector cv) {
  std::uint32_t* const pairs = w.tally.histogram_pairs + r * Summary::kBins * Summary::kBins;
  const hn::RebindToSigned<Tag> integers;
  // four bins to an octave: exponent and the first two bits of the fraction
  const auto bin = hn::Sub(hn::ShiftRight<50>(hn::BitCast(integers, cv)), hn::Set(integers, w.tally.first_bin[r]));
  const auto within = hn::Min(hn::Max(bin, hn::Zero(integers)), hn::Set(integers, Summary::kBins - 1));
  HWY_ALIGN std::int64_t bins[kLanes];
  hn::StoreU(within, integers, bins);
  if constexpr (kWidth == 1) {
    ++pairs[static_cast<std::size_t>(bins[0]) * Summary::kBins + Summary::kBins - 1];
  } else {
    for (std::size_t i = 0; i < kWidth; i += 2)
      ++pairs[static_cast<std::size_t>(bins[i]) * Summary::kBins + static_cast<std::size_t>(bins[i + 1])];
  }
}

/// Adds the pairs counted so far up; the table would overflow some time.
HWY_NOINLINE void add_pairs_of_bins(PairWork& w) {
  if (!w.tally.wanted) return;
  constexpr std::size_t n = Summary::kBins;
  for (std::size_t r = 0; r < w.n_responses; ++r) {
    std::uint32_t* const pairs = w.tally.histogram_pairs + r * n * n;
    std::uint64_t* const bins = w.tally.histogram + r * n;
    for (std::size_t i = 0; i < n; ++i) {
      for (std::size_t j = 0; j < n; ++j) {
        bins[i] += pairs[i * n + j];
        bins[j] += pairs[i * n + j];
        pairs[i * n + j] = 0;
      }
    }
  }
}

/// The scores of the pairs of one row predictor (or of the single columns) at a node, before they are taken: vectors of
/// held-out SSE and RSS, lanes that are no candidates infinite.
template <int R>
struct Batch {
  Place at;              ///< of the first vector
  double factor;         ///< penalised RSS = RSS · factor
  std::size_t n_rows;    ///< vectors stand row by row …
  std::size_t n_blocks;  ///< … and block by block of kWidth lanes
  const double* cv[R];
  const double* rss[R];
  std::size_t row_stride, block_stride;  ///< between vectors, in numbers
  Vector least_cv[R], least_rss[R];      ///< minima over the vectors
};

/// Shows the lists what they may want and adds the weights that matter.
template <int R, bool kTally>
HWY_INLINE void take(PairWork& w, const Batch<R>& batch) {
  const std::size_t k = w.outer_columns + batch.at.picks;
  for (std::size_t r = 0; r < R; ++r) {
    const auto each = [&](const auto& body) {
      Place at = batch.at;
      for (std::size_t i = 0; i < batch.n_rows; ++i) {
        if (at.row != PairSink::kNone) at.row = batch.at.row + i;
        for (std::size_t b = 0; b < batch.n_blocks; ++b) {
          at.first_lane = batch.at.first_lane + b * kWidth;
          const std::size_t offset = i * batch.row_stride + b * batch.block_stride;
          body(at, load(batch.cv[r] + offset), load(batch.rss[r] + offset));
        }
      }
    };
    const auto wanted = [&](Vector cv, Vector rss) {
      return hn::Or(hn::Le(cv, all(w.limit_cv[r])), hn::Le(rss, all(w.limit_rss[k * R + r])));
    };
    if (HWY_UNLIKELY(!hn::AllFalse(kTag, wanted(batch.least_cv[r], batch.least_rss[r])))) {
      each([&](const Place& at, Vector cv, Vector rss) {
        // infinite lanes are no candidates, even while a list takes anything
        const auto hits = hn::And(wanted(cv, rss), hn::Lt(cv, all(kInfinity)));
        if (!hn::AllFalse(kTag, hits)) offer(w, at, r, bits_of(hits), cv, rss);
      });
    }
    if constexpr (kTally) {
      const auto weighs = [&](Vector rss) { return hn::Le(hn::Mul(rss, all(batch.factor)), all(w.weight_limit[r])); };
      if (HWY_UNLIKELY(!hn::AllFalse(kTag, weighs(batch.least_rss[r])))) {
        each([&](const Place& at, Vector, Vector rss) {
          if (!hn::AllFalse(kTag, weighs(rss))) add_weights(w, at, r, hn::Mul(rss, all(batch.factor)));
        });
      }
    }
  }
}

/// Counts the lanes of a vector whose smallest pivot is too small, and makes their scores infinite.
template <int R>
HWY_NOINLINE void set_aside(PairWork& w, unsigned inside, Vector smallest, Vector (&cv)[R], Vector (&rss)[R]) {
  // not "<=": also what is not a number
  const auto good = hn::Gt(smallest, all(w.smallest_pivot));
  const unsigned bad = ~bits_of(good) & inside;
  const auto n_bad = static_cast<std::uint64_t>(__builtin_popcount(bad)) * R;
  w.n_inseparable += n_bad;
  w.n_scored -= n_bad;
  for (int r = 0; r < R; ++r) {
    cv[r] = hn::IfThenElse(good, cv[r], all(kInfinity));
    rss[r] = hn::IfThenElse(good, rss[r], all(kInfinity));
  }
}

HWY_INLINE bool all_separable(const PairWork& w, Vector smallest) {
  return hn::AllTrue(kTag, hn::Gt(smallest, all(w.smallest_pivot)));
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

// ---- bringing in a column ------------------------------------------------------------------------------------------

/// The column that is brought in, in one fold.
template <int R>
struct Pivot {
  using F = FoldFields<R>;
  /// `rows`: of the fold.
  HWY_INLINE Pivot(const double* fold, const double* rows, std::size_t row_offset, std::size_t lane)
      : row(rows + row_offset),
        inverse(all(fold[F::inverse(lane)])),
        v(all(fold[F::v(lane)])),
        two_v(all(2.0 * fold[F::v(lane)])) {
    for (int r = 0; r < R; ++r) {
      my[r] = all(fold[F::my(static_cast<std::size_t>(r), lane)]);
      hy[r] = all(fold[F::hy(static_cast<std::size_t>(r), lane)]);
    }
  }
  const double* row;
  Vector inverse, v, two_v;
  Vector my[R], hy[R];
};

/// A vector of open columns after the pivot.
template <int R>
struct Open {
  using F = FoldFields<R>;
  HWY_INLINE Open(const Pivot<R>& pivot, const double* fold, std::size_t lane)
      : a_pivot(load(pivot.row + in_row(lane))),
        u_pivot(load(pivot.row + in_row(lane) + kLanes)),
        m(hn::Mul(a_pivot, pivot.inverse)) {
    const Vector t = hn::MulSub(m, pivot.v, u_pivot);
    a = hn::NegMulAdd(m, a_pivot, load(fold + F::a(lane)));
    v = hn::MulAdd(m, t, load(fold + F::v(lane)));
    for (int r = 0; r < R; ++r) {
      const auto i = static_cast<std::size_t>(r);
      ya[r] = hn::NegMulAdd(pivot.my[r], a_pivot, load(fold + F::ya(i, lane)));
      yu[r] = hn::NegMulAdd(m, pivot.hy[r], hn::NegMulAdd(pivot.my[r], u_pivot, load(fold + F::yu(i, lane))));
    }
  }
  HWY_INLINE Vector h(const Pivot<R>& pivot) const { return hn::NegMulAdd(m, pivot.two_v, u_pivot); }

  Vector a_pivot, u_pivot, m, a, v;
  Vector ya[R], yu[R];
};

/// Columns after the pivot as rows of pairs: what is broadcast.
struct Derived {
  Vector my, hy, change;
};
HWY_INLINE Derived derive(Vector ya, Vector yu, Vector v, Vector inverse) {
  const Vector my = hn::Mul(ya, inverse);
  const Vector my_v = hn::Mul(my, v);
  return {my, hn::NegMulAdd(all(2.0), my_v, yu), hn::Mul(my, hn::Sub(my_v, yu))};
}

/// A pair in one fold: what row a does to the columns b, and the change of the held-out SSE by b after a.
template <int R, class RowOf>
HWY_INLINE void add_pair(Vector ra, Vector ua, Vector inverse_a, Vector v_a, const RowOf& my_a, const RowOf& hy_a,
                         Vector a_b, Vector v_b, const Vector (&ya_b)[R], const Vector (&yu_b)[R], Vector& smallest,
                         Vector* sum) {
  const Vector m = hn::Mul(ra, inverse_a);
  const Vector d = hn::NegMulAdd(m, ra, a_b);
  const Vector v = hn::MulAdd(m, hn::MulSub(m, v_a, ua), v_b);
  smallest = smaller(d, smallest);
  const Vector inverse = reciprocal(d);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector b = hn::NegMulAdd(my_a(r), ra, ya_b[r]);
    const Vector beta = hn::Mul(b, inverse);
    const Vector u = hn::NegMulAdd(m, hy_a(r), hn::NegMulAdd(my_a(r), ua, yu_b[r]));
    sum[r] = hn::MulAdd(beta, hn::MulSub(beta, v, u), sum[r]);
  }
}

/// A pair in the matrix of all rows.
template <int R, class RowOf>
HWY_INLINE void pair_rss(Vector ra, Vector inverse_a, const RowOf& my_a, Vector a_b, const Vector (&ya_b)[R],
                         Vector& smallest, Vector (&rss)[R]) {
  const Vector d = hn::NegMulAdd(hn::Mul(ra, inverse_a), ra, a_b);
  smallest = smaller(d, smallest);
  const Vector inverse = reciprocal(d);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector b = hn::NegMulAdd(my_a(r), ra, ya_b[r]);
    rss[r] = hn::NegMulAdd(R > 1 ? hn::Mul(b, inverse) : hn::Div(b, d), b, rss[r]);
  }
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

// ---- tallies of a node ---------------------------------------------------------------------------------------------

template <int R>
void clear_node(PairWork& w, std::size_t level, std::size_t open) {
  PairTally& t = w.tally;
  for (int x = 0; x < 2; ++x)
    for (std::size_t p = 0; p < open; ++p)
      for (std::size_t r = 0; r < R; ++r) store(all(kInfinity), t.best_group[x] + group_cell(w, level, p, r));
  for (std::size_t r = 0; r < R; ++r) store(hn::Zero(kTag), t.weight_node + node_cell(w, level, r));
}

/// Lowers a cell; true when that changed it.
HWY_INLINE bool lowers(double* cell, Vector v) {
  const Vector old = load(cell);
  store(hn::Min(old, v), cell);
  return !hn::AllFalse(kTag, hn::Lt(v, old));
}

double least(const double* cell) { return *std::min_element(cell, cell + kWidth); }

/// Sets the gates anew: what the pairs of each row predictor, or the two last predictors, must beat to lower a cell.
HWY_NOINLINE void renew_gates(PairWork& w, int x, std::size_t r) {
  const PairShape& shape = *w.shape;
  PairTally& t = w.tally;
  double below = 0.0;  // the worst of the cells of lower predictors
  for (std::size_t p = 0; p < shape.n_predictors(); ++p) {
    double own = 0.0;
    for (std::size_t i = 0; i < shape.n_columns[p + 1] - shape.n_columns[p]; ++i) {
      const std::size_t lane = shape.first_lane[p] + i;
      const double column = least(t.best_column[x] + column_cell(w, r, lane));
      own = std::max(own, std::min(column, t.best_lane[x][lane_cell(w, r, lane)]));
    }
    t.gate_rows[x][r * shape.n_predictors() + p] = std::max(below, own);
    if (p == 1) t.gate_last[x][r] = std::max(below, own);
    if (p == 0) below = own;
    // absence of a lower predictor counts for rows above it only where another is in the lanes
    below = std::max({below, own, least(t.best_absent[x] + absent_cell(w, r, p))});
  }
}

/// What the pairs of one row predictor, by lane in row_best, say of the forms below it and of their absence: every
/// other predictor below is absent from those in whose lanes it does not stand. True when a cell was lowered.
bool lower_lanes(PairWork& w, int x, std::size_t r, std::size_t predictor) {
  const PairShape& shape = *w.shape;
  PairTally& t = w.tally;
  const double* const lanes = t.row_best[x] + lane_cell(w, r, 0);
  bool lowered = false;
  for (std::size_t b = 0; b < shape.first_lane[predictor]; b += kWidth)
    lowered |= lowers(t.best_lane[x] + lane_cell(w, r, b), load(lanes + b));
  double first = kInfinity;
  double second = kInfinity;
  std::size_t first_at = 0;
  for (std::size_t p = 0; p < predictor; ++p) {
    double own = kInfinity;
    for (std::size_t b = shape.first_lane[p]; b < shape.first_lane[p + 1]; ++b) own = std::min(own, lanes[b]);
    if (own < first) {
      second = first;
      first = own;
      first_at = p;
    } else {
      second = std::min(second, own);
    }
  }
  for (std::size_t p = 0; p < predictor; ++p) {
    double& cell = t.best_absent[x][absent_cell(w, r, p)];
    const double without = p == first_at ? second : first;
    lowered |= without < cell;
    cell = std::min(cell, without);
  }
  return lowered;
}

/// Everything at and below a node whose highest further predictor is lower than p lacks p.
template <int R>
void close_node(PairWork& w, std::size_t level, std::size_t open) {
  PairTally& t = w.tally;
  for (int x = 0; x < 2; ++x) {
    for (std::size_t r = 0; r < R; ++r) {
      Vector below = all(kInfinity);
      for (std::size_t p = 0; p < open; ++p) {
        lower(t.best_absent[x] + absent_cell(w, r, p), below);
        below = hn::Min(below, load(t.best_group[x] + group_cell(w, level, p, r)));
      }
      store(below, t.best_node[x] + node_cell(w, level, r));
    }
  }
}

/// Hands a finished child's tally to its column and its parent.
template <int R>
HWY_INLINE void pass_up(PairWork& w, std::size_t level, std::size_t lane, std::size_t predictor) {
  PairTally& t = w.tally;
  for (std::size_t r = 0; r < R; ++r) {
    for (int x = 0; x < 2; ++x) {
      const Vector best = load(t.best_node[x] + node_cell(w, level + 1, r));
      lower(t.best_column[x] + column_cell(w, r, lane), best);
      lower(t.best_group[x] + group_cell(w, level, predictor, r), best);
    }
    const Vector weight = load(t.weight_node + node_cell(w, level + 1, r));
    increase(t.weight_column + column_cell(w, r, lane), weight);
    increase(t.weight_node + node_cell(w, level, r), weight);
  }
}

/// The best of the forms of the two last predictors, from the scores of a node that may lower some of them.
[[maybe_unused]] HWY_NOINLINE void lower_last_columns(PairWork& w, int x, std::size_t r, const double* scores,
                                                      double factor, std::size_t n_rows, std::size_t n_blocks) {
  PairTally& t = w.tally;
  const std::size_t first_row = w.shape->first_lane[1];
  bool lowered = false;
  for (std::size_t i = 0; i < n_rows; ++i) {
    Vector row = all(kInfinity);
    for (std::size_t b = 0; b < n_blocks; ++b) {
      const Vector v = hn::Mul(load(scores + (i * n_blocks + b) * kWidth), all(factor));
      lowered |= lowers(t.best_lane[x] + lane_cell(w, r, b * kWidth), v);
      row = hn::Min(row, v);
    }
    lowered |= lowers(t.best_column[x] + column_cell(w, r, first_row + i), row);
  }
  if (lowered) renew_gates(w, x, r);
}

// ---- the child whose two open predictors are the last: everything in registers --------------------------------------

/// The scores of the pairs of the last two predictors of one node: vectors [row × blocks + block]. What is no
/// candidate, or not separable, is infinite.
template <int R>
struct LastScores {
  static constexpr std::size_t kMost = 8 * kLanes;  ///< rows × lanes
  HWY_ALIGN double cv[R][kMost];
  HWY_ALIGN double rss[R][kMost];
  HWY_ALIGN double smallest[kMost];
};

/// The rows of these pairs: values of the second predictor's columns, to be broadcast.
template <int R, std::size_t kLanesOfRows>
struct RowColumns {
  HWY_ALIGN double m[kLanesOfRows], h[kLanesOfRows], inverse[kLanesOfRows], v[kLanesOfRows], smallest[kLanesOfRows];
  HWY_ALIGN double my[R][kLanesOfRows], hy[R][kLanesOfRows], base[R][kLanesOfRows], base_rss[R][kLanesOfRows];
};

/// Held-out SSE and RSS of the pairs of the last two predictors after `lane` has been brought in, with everything in
/// registers. kRows forms of the second predictor; the first has at most kBlocks · kWidth. `kShared`: both stand in the
/// first kLanes lanes.
template <int kRows, int kBlocks, int R, bool kShared>
HWY_NOINLINE void score_last_pairs(PairWork& w, std::size_t level, std::size_t lane, LastScores<R>& scores) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const PairLevel& parent = w.levels[level];
  constexpr std::size_t kRowLanes = kShared ? kLanes : (kRows + kWidth - 1) / kWidth * kWidth;
  const std::size_t rows_lane = kShared ? 0 : shape.first_lane[1];  // where the vectors of rows start …
  const std::size_t first_row = shape.first_lane[1] - rows_lane;    // … and the first row in them
  const std::size_t rows_at = F::rows(parent.stride) + shape.row_offset[shape.first_lane[1]];
  const std::size_t pivot_at = F::rows(parent.stride) + shape.row_offset[lane];
  // rows of the second predictor are as long as the first has lanes
  constexpr std::size_t kRowSize = 2 * padded(kBlocks * kWidth);
  constexpr std::size_t kPairs = kRows * kBlocks;

  RowColumns<R, kRowLanes> row_values;
  auto& [m, h, inverse, v, row_smallest, my, hy, base, base_rss] = row_values;
  Vector sum[kPairs * R];
  Vector smallest[kPairs];
  unrolled<kPairs>([&](auto i) __attribute__((always_inline)) { smallest[i] = all(kInfinity); });
  unrolled<kPairs * R>([&](auto i) __attribute__((always_inline)) { sum[i] = hn::Zero(kTag); });
  for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
    store(all(kInfinity), row_smallest + i);
    for (std::size_t r = 0; r < R; ++r) {
      store(all(parent.base_cv[r * parent.stride + lane]), base[r] + i);
      store(all(parent.base_rss[r * parent.stride + lane]), base_rss[r] + i);
    }
  }
  const std::size_t n_folds = w.n_folds;
  const std::size_t fold_size = parent.fold_size;
  const double* fold = parent.folds;
  for (std::size_t f = 0; f < n_folds; ++f, fold += fold_size) {
    const Pivot<R> pivot(fold, fold, pivot_at, lane);
    for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
      const Open<R> row(pivot, fold, rows_lane + i);
      store(row.m, m + i);
      store(row.h(pivot), h + i);
      store(row.v, v + i);
      lower(row_smallest + i, row.a);
      const Vector inverse_i = reciprocal(row.a);
      store(inverse_i, inverse + i);
      for (int r = 0; r < R; ++r) {
        const Derived derived = derive(row.ya[r], row.yu[r], row.v, inverse_i);
        store(derived.my, my[r] + i);
        store(derived.hy, hy[r] + i);
        increase(base[r] + i, derived.change);
      }
    }
    settle(&row_values);
    const double* const rows = fold + rows_at;
    unrolled<kBlocks>([&](auto b) __attribute__((always_inline)) {
      const Open<R> last(pivot, fold, b * kWidth);
      unrolled<kRows>([&](auto i) __attribute__((always_inline)) {
        const double* const row = rows + i * kRowSize + in_row(b * kWidth);
        const std::size_t at = first_row + i;
        const Vector m_i = all(m[at]);
        const Vector ra = hn::NegMulAdd(m_i, last.a_pivot, load(row));
        const Vector ua = hn::NegMulAdd(all(h[at]), last.m, hn::NegMulAdd(m_i, last.u_pivot, load(row + kLanes)));
        constexpr std::size_t kPair = i * kBlocks + b;
        add_pair<R>(ra, ua, all(inverse[at]), all(v[at]), RowValues{my[0] + at, kRowLanes},
                    RowValues{hy[0] + at, kRowLanes}, last.a, last.v, last.ya, last.yu, smallest[kPair],
                    sum + kPair * R);
      });
    });
  }
  unrolled<kPairs>([&](auto i) __attribute__((always_inline)) {
    store(smallest[i], scores.smallest + i * kWidth);
    unrolled<R>([&](auto r) __attribute__((always_inline)) { store(sum[i * R + r], scores.cv[r] + i * kWidth); });
  });

  const double* const everything = parent.all_rows;
  const double* const pivot_row = everything + pivot_at;
  const Vector pivot_inverse = all(everything[F::inverse(lane)]);
  const RowValues pivot_my{everything + F::my(0, lane), kLanes};
  for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
    const Vector a_pivot = load(pivot_row + in_row(rows_lane + i));
    const Vector m_i = hn::Mul(a_pivot, pivot_inverse);
    const Vector a = hn::NegMulAdd(m_i, a_pivot, load(everything + F::a(rows_lane + i)));
    const Vector inverse_i = reciprocal(a);
    store(m_i, m + i);
    store(inverse_i, inverse + i);
    lower(row_smallest + i, a);
    for (std::size_t r = 0; r < R; ++r) {
      const Vector ya = hn::NegMulAdd(pivot_my(r), a_pivot, load(everything + F::ya(r, rows_lane + i)));
      const Vector my_i = hn::Mul(ya, inverse_i);
      store(my_i, my[r] + i);
      store(hn::NegMulAdd(my_i, ya, load(base_rss[r] + i)), base_rss[r] + i);
    }
  }
  settle(&row_values);
  for (std::size_t b = 0; b < kBlocks; ++b) {
    const std::size_t first_lane = b * kWidth;
    const auto inside = hn::FirstN(kTag, shape.n_columns[1] - first_lane);
    const Vector a_pivot = load(pivot_row + in_row(first_lane));
    const Vector a_b = hn::NegMulAdd(hn::Mul(a_pivot, pivot_inverse), a_pivot, load(everything + F::a(first_lane)));
    Vector ya_b[R];
    for (std::size_t r = 0; r < R; ++r)
      ya_b[r] = hn::NegMulAdd(pivot_my(r), a_pivot, load(everything + F::ya(r, first_lane)));
    for (std::size_t i = 0; i < kRows; ++i) {
      const std::size_t at = first_row + i;
      const std::size_t pair = (i * kBlocks + b) * kWidth;
      const Vector ra =
          hn::NegMulAdd(all(m[at]), a_pivot, load(everything + rows_at + i * kRowSize + in_row(first_lane)));
      Vector rss[R];
      for (std::size_t r = 0; r < R; ++r) rss[r] = all(base_rss[r][at]);
      Vector least = smaller(all(row_smallest[at]), load(scores.smallest + pair));
      pair_rss<R>(ra, all(inverse[at]), RowValues{my[0] + at, kRowLanes}, a_b, ya_b, least, rss);
      store(hn::IfThenElse(inside, least, all(kInfinity)), scores.smallest + pair);
      for (std::size_t r = 0; r < R; ++r) {
        const Vector cv = hn::Add(load(scores.cv[r] + pair), all(base[r][at]));
        store(hn::IfThenElse(inside, at_least_zero(cv), all(kInfinity)), scores.cv[r] + pair);
        store(hn::IfThenElse(inside, at_least_zero(rss[r]), all(kInfinity)), scores.rss[r] + pair);
      }
    }
  }
}

/// Makes what is not separable infinite.
template <int R>
HWY_NOINLINE void set_last_aside(PairWork& w, LastScores<R>& scores, std::size_t n_rows, std::size_t n_blocks) {
  for (std::size_t i = 0; i < n_rows * n_blocks; ++i) {
    Vector cv[R];
    Vector rss[R];
    for (std::size_t r = 0; r < R; ++r) {
      cv[r] = load(scores.cv[r] + i * kWidth);
      rss[r] = load(scores.rss[r] + i * kWidth);
    }
    const std::size_t first_lane = i % n_blocks * kWidth;
    set_aside<R>(w, first_bits(w.shape->n_columns[1] - first_lane), load(scores.smallest + i * kWidth), cv, rss);
    for (std::size_t r = 0; r < R; ++r) {
      store(cv[r], scores.cv[r] + i * kWidth);
      store(rss[r], scores.rss[r] + i * kWidth);
    }
  }
}

/// Takes the scores of the last two predictors' pairs below `lane`.
template <int R, bool kTally>
void take_last_pairs(PairWork& w, std::size_t level, std::size_t lane, LastScores<R>& scores, std::size_t n_rows,
                     std::size_t n_blocks) {
  const PairShape& shape = *w.shape;
  const std::size_t picks = level + 3;
  w.path[level] = lane;
  w.n_scored += n_rows * shape.n_columns[1] * R;
  Vector least = all(kInfinity);
  for (std::size_t i = 0; i < n_rows * n_blocks; ++i) least = hn::Min(least, load(scores.smallest + i * kWidth));
  if (HWY_UNLIKELY(!all_separable(w, least))) set_last_aside<R>(w, scores, n_rows, n_blocks);
  Batch<R> batch;
  batch.at = {level + 1, shape.first_lane[1], picks, level + 1, 0};
  batch.factor = kTally ? w.summary_factor[w.outer_columns + picks] : 1.0;
  batch.n_rows = n_rows;
  batch.n_blocks = n_blocks;
  batch.row_stride = n_blocks * kWidth;
  batch.block_stride = kWidth;
  for (std::size_t r = 0; r < R; ++r) {
    batch.cv[r] = scores.cv[r];
    batch.rss[r] = scores.rss[r];
    batch.least_cv[r] = batch.least_rss[r] = all(kInfinity);
    for (std::size_t i = 0; i < n_rows * n_blocks; ++i) {
      batch.least_cv[r] = hn::Min(batch.least_cv[r], load(scores.cv[r] + i * kWidth));
      batch.least_rss[r] = hn::Min(batch.least_rss[r], load(scores.rss[r] + i * kWidth));
    }
  }
  if constexpr (kTally)
    for (std::size_t r = 0; r < R; ++r) store(hn::Zero(kTag), w.tally.weight_node + node_cell(w, level + 1, r));
  take<R, kTally>(w, batch);
  if constexpr (kTally) {
    PairTally& t = w.tally;
    for (std::size_t r = 0; r < R; ++r) {
      for (std::size_t i = 0; i < n_rows * n_blocks; ++i) count_in_histogram(w, r, load(scores.cv[r] + i * kWidth));
      const Vector node_best[2] = {batch.least_cv[r], hn::Mul(batch.least_rss[r], all(batch.factor))};
      for (int x = 0; x < 2; ++x) {
        store(node_best[x], t.best_node[x] + node_cell(w, level + 1, r));
        lower(t.best_picks[x] + picks_cell(w, r, picks), node_best[x]);
        if (HWY_UNLIKELY(!hn::AllFalse(kTag, hn::Lt(node_best[x], all(t.gate_last[x][r])))))
          lower_last_columns(w, x, r, x == 0 ? scores.cv[r] : scores.rss[r], x == 0 ? 1.0 : batch.factor, n_rows,
                             n_blocks);
      }
    }
    pass_up<R>(w, level, lane, shape.predictor_of_lane[lane]);
  }
}

// ---- any child -----------------------------------------------------------------------------------------------------

/// Columns from the second predictor on may be rows or be picked: their inverses, multipliers and bases.
template <int R>
HWY_INLINE void derive_columns(double* fold, std::size_t lane, Vector a, double* base_cv, std::size_t stride) {
  using F = FoldFields<R>;
  const Vector inverse = reciprocal(a);
  store(inverse, fold + F::inverse(lane));
  const Vector v = load(fold + F::v(lane));
  for (std::size_t r = 0; r < R; ++r) {
    const Derived derived = derive(load(fold + F::ya(r, lane)), load(fold + F::yu(r, lane)), v, inverse);
    store(derived.my, fold + F::my(r, lane));
    store(derived.hy, fold + F::hy(r, lane));
    increase(base_cv + r * stride + lane, derived.change);
  }
}

template <int R>
HWY_INLINE void derive_all_rows(double* everything, std::size_t lane, double* base_rss, std::size_t stride) {
  using F = FoldFields<R>;
  const Vector inverse = reciprocal(load(everything + F::a(lane)));
  store(inverse, everything + F::inverse(lane));
  for (std::size_t r = 0; r < R; ++r) {
    const Vector ya = load(everything + F::ya(r, lane));
    const Vector my = hn::Mul(ya, inverse);
    store(my, everything + F::my(r, lane));
    store(hn::NegMulAdd(my, ya, load(base_rss + r * stride + lane)), base_rss + r * stride + lane);
  }
}

/// The columns of a child in one fold, written to `out`; multipliers to the scratch.
template <int R>
void bring_in_columns(PairWork& w, const PairLevel& parent, const PairLevel& child, const double* fold, double* out,
                      std::size_t lane, std::size_t n_open) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const Pivot<R> pivot(fold, fold + F::rows(parent.stride), shape.row_offset[lane], lane);
  double* const m = w.multipliers;
  double* const h = m + padded(shape.n_lanes());
  const std::size_t first_row = shape.first_lane[1];
  double* const base_cv = child.base_cv;
  double* const smallest = child.smallest;
  for (std::size_t b = 0; b < n_open; b += kWidth) {
    const Open<R> open(pivot, fold, b);
    store(open.m, m + b);
    store(open.h(pivot), h + b);
    store(open.a, out + F::a(b));
    store(open.v, out + F::v(b));
    lower(smallest + b, open.a);
    for (std::size_t r = 0; r < R; ++r) {
      store(open.ya[r], out + F::ya(r, b));
      store(open.yu[r], out + F::yu(r, b));
    }
    if (b + kWidth > first_row) derive_columns<R>(out, b, open.a, base_cv, child.stride);
  }
}

/// The rows of a child in one fold, scored on the way and kept where the child has children.
template <int R, bool kStore, bool kScore, bool kFirst>
void bring_in_rows(PairWork& w, const PairLevel& parent, const PairLevel& child, const double* fold, double* out,
                   std::size_t lane, std::size_t open) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const double* const rows = fold + F::rows(parent.stride);
  const double* const pivot_row = rows + shape.row_offset[lane];
  double* const new_rows = out + F::rows(child.stride);
  const double* const m = w.multipliers;
  const double* const h = m + padded(shape.n_lanes());
  const std::size_t* const row_offset = shape.row_offset.data();
  const std::size_t plane = shape.row_offset.back() / 2;
  double* const sums = w.pair_scores;
  const std::size_t last_row = shape.first_lane[open];
  std::size_t predictor = 1;
  for (std::size_t b = 0; b < shape.first_lane[open - 1]; b += kWidth) {
    while (shape.first_lane[predictor] <= b) ++predictor;
    const Vector a_pivot = load(pivot_row + in_row(b));
    const Vector u_pivot = load(pivot_row + in_row(b) + kLanes);
    const Vector m_b = load(m + b);
    const Vector a_b = load(out + F::a(b));
    const Vector v_b = load(out + F::v(b));
    Vector ya_b[R];
    Vector yu_b[R];
    for (std::size_t r = 0; r < R; ++r) {
      ya_b[r] = load(out + F::ya(r, b));
      yu_b[r] = load(out + F::yu(r, b));
    }
    HWY_UNROLL(2)
    for (std::size_t a = shape.first_lane[predictor]; a < last_row; ++a) {
      const std::size_t offset = row_offset[a] + in_row(b);
      const Vector m_a = all(m[a]);
      const Vector ra = hn::NegMulAdd(m_a, a_pivot, load(rows + offset));
      const Vector ua = hn::NegMulAdd(all(h[a]), m_b, hn::NegMulAdd(m_a, u_pivot, load(rows + offset + kLanes)));
      if constexpr (kStore) {
        store(ra, new_rows + offset);
        store(ua, new_rows + offset + kLanes);
      }
      if constexpr (kScore) {
        double* const cell = sums + row_offset[a] / 2 + b;
        Vector sum[R];
        for (std::size_t r = 0; r < R; ++r) sum[r] = kFirst ? hn::Zero(kTag) : load(cell + r * plane);
        Vector smallest = kFirst ? all(kInfinity) : load(cell + R * plane);
        add_pair<R>(ra, ua, all(out[F::inverse(a)]), all(out[F::v(a)]), RowValues{out + F::my(0, a), kLanes},
                    RowValues{out + F::hy(0, a), kLanes}, a_b, v_b, ya_b, yu_b, smallest, sum);
        for (std::size_t r = 0; r < R; ++r) store(sum[r], cell + r * plane);
        store(smallest, cell + R * plane);
      }
    }
  }
}

/// The matrix of all rows of a child: columns, and rows where they are kept.
template <int R, bool kStore>
void bring_in_all_rows(PairWork& w, const PairLevel& parent, const PairLevel& child, std::size_t lane,
                       std::size_t open) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const double* const everything = parent.all_rows;
  double* const out = child.all_rows;
  const double* const pivot_row = everything + F::rows(parent.stride) + shape.row_offset[lane];
  const Vector inverse = all(everything[F::inverse(lane)]);
  double* const m = w.multipliers;
  for (std::size_t b = 0; b < shape.first_lane[open]; b += kWidth) {
    const Vector a_pivot = load(pivot_row + in_row(b));
    const Vector m_b = hn::Mul(a_pivot, inverse);
    store(m_b, m + b);
    const Vector a = hn::NegMulAdd(m_b, a_pivot, load(everything + F::a(b)));
    store(a, out + F::a(b));
    lower(child.smallest + b, a);
    for (std::size_t r = 0; r < R; ++r)
      store(hn::NegMulAdd(all(everything[F::my(r, lane)]), a_pivot, load(everything + F::ya(r, b))), out + F::ya(r, b));
    if (b + kWidth > shape.first_lane[1]) derive_all_rows<R>(out, b, child.base_rss, child.stride);
  }
  if constexpr (kStore) {
    for (std::size_t a = shape.first_lane[1]; a < shape.first_lane[open]; ++a) {
      const Vector m_a = all(m[a]);
      const double* const row = everything + F::rows(parent.stride) + shape.row_offset[a];
      double* const new_row = out + F::rows(child.stride) + shape.row_offset[a];
      for (std::size_t b = 0; b < shape.row_length[a]; b += kWidth)
        store(hn::NegMulAdd(m_a, load(pivot_row + in_row(b)), load(row + in_row(b))), new_row + in_row(b));
    }
  }
}

/// The pairs of one row predictor that may lower a cell: by column of the row and by lane.
template <int R>
HWY_NOINLINE void lower_columns(PairWork& w, int x, std::size_t r, std::size_t predictor, const Batch<R>& batch) {
  PairTally& t = w.tally;
  bool lowered = false;
  const double* const scores = x == 0 ? batch.cv[r] : batch.rss[r];
  const double factor = x == 0 ? 1.0 : batch.factor;
  double* const lanes = t.row_best[x] + lane_cell(w, r, 0);
  for (std::size_t b = 0; b < batch.n_blocks; ++b) store(all(kInfinity), lanes + b * kWidth);
  for (std::size_t i = 0; i < batch.n_rows; ++i) {
    Vector row = all(kInfinity);
    for (std::size_t b = 0; b < batch.n_blocks; ++b) {
      const Vector v = hn::Mul(load(scores + i * batch.row_stride + b * kWidth), all(factor));
      lower(lanes + b * kWidth, v);
      row = hn::Min(row, v);
    }
    lowered |= lowers(t.best_column[x] + column_cell(w, r, batch.at.row + i), row);
  }
  lowered |= lower_lanes(w, x, r, predictor);
  if (lowered) renew_gates(w, x, r);
}

/// Takes the pairs of a node, one row predictor after another. `row_of(a, b)` gives the node's row of all rows,
/// `scores(a, b, …)` the sums over the folds without the base. What has been scored stays in the scratch.
template <int R, bool kTally, class RowOf, class Scores>
void take_pairs(PairWork& w, const PairLevel& node, std::size_t level, std::size_t open, const RowOf& row_of,
                const Scores& scores) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const double* const everything = node.all_rows;
  const std::size_t picks = level + 2;
  const std::size_t plane = shape.row_offset.back() / 2;
  double* const cv_plane = w.pair_scores;
  double* const rss_plane = w.pair_scores + (R + 1) * plane;
  const double factor = kTally ? w.summary_factor[w.outer_columns + picks] : 1.0;
  for (std::size_t p = 1; p < open; ++p) {
    const std::size_t n = shape.first_lane[p];
    const std::size_t n_forms = shape.first_lane[p + 1] - n;
    w.n_scored += n_forms * shape.n_columns[p] * R;
    const std::size_t first = shape.row_offset[n] / 2;
    Batch<R> batch{
        {level, n, picks, level, 0}, factor, n_forms, (n + kWidth - 1) / kWidth, {}, {}, padded(n), kWidth, {}, {}};
    for (std::size_t r = 0; r < R; ++r) {
      batch.cv[r] = cv_plane + r * plane + first;
      batch.rss[r] = rss_plane + r * plane + first;
      batch.least_cv[r] = batch.least_rss[r] = all(kInfinity);
    }
    for (std::size_t a = n; a < n + n_forms; ++a) {
      for (std::size_t b = 0; b < n; b += kWidth) {
        Vector cv[R];
        Vector rss[R];
        Vector ya_b[R];
        Vector least = all(node.smallest[a]);
        scores(a, b, cv, least);
        // lanes of the row's own predictor, and padding, are no pairs
        const unsigned inside = b + kWidth > n ? first_bits(n - b) : first_bits(kWidth);
        const Vector padding = load(w.padding + b);
        for (std::size_t r = 0; r < R; ++r) {
          cv[r] = hn::Add(cv[r], hn::Add(padding, all(node.base_cv[r * node.stride + a])));
          rss[r] = hn::Add(padding, all(node.base_rss[r * node.stride + a]));
          ya_b[r] = load(everything + F::ya(r, b));
        }
        pair_rss<R>(row_of(a, b), all(everything[F::inverse(a)]), RowValues{everything + F::my(0, a), kLanes},
                    load(everything + F::a(b)), ya_b, least, rss);
        if (HWY_UNLIKELY(inside != first_bits(kWidth))) {
          const auto keep = hn::FirstN(kTag, n - b);
          least = hn::IfThenElse(keep, least, all(kInfinity));
          for (std::size_t r = 0; r < R; ++r) {
            cv[r] = hn::IfThenElse(keep, cv[r], all(kInfinity));
            rss[r] = hn::IfThenElse(keep, rss[r], all(kInfinity));
          }
        }
        for (std::size_t r = 0; r < R; ++r) {
          cv[r] = at_least_zero(cv[r]);
          rss[r] = at_least_zero(rss[r]);
        }
        if (HWY_UNLIKELY(!all_separable(w, least))) set_aside<R>(w, inside_bits(shape, p, b), least, cv, rss);
        for (std::size_t r = 0; r < R; ++r) {
          store(cv[r], cv_plane + r * plane + shape.row_offset[a] / 2 + b);
          store(rss[r], rss_plane + r * plane + shape.row_offset[a] / 2 + b);
          batch.least_cv[r] = hn::Min(batch.least_cv[r], cv[r]);
          batch.least_rss[r] = hn::Min(batch.least_rss[r], rss[r]);
          if constexpr (kTally) count_in_histogram(w, r, cv[r]);
        }
      }
    }
    take<R, kTally>(w, batch);
    if constexpr (kTally) {
      for (int x = 0; x < 2; ++x) {
        for (std::size_t r = 0; r < R; ++r) {
          const Vector best = x == 0 ? batch.least_cv[r] : hn::Mul(batch.least_rss[r], all(factor));
          lower(w.tally.best_group[x] + group_cell(w, level, p, r), best);
          lower(w.tally.best_picks[x] + picks_cell(w, r, picks), best);
          const double gate = w.tally.gate_rows[x][r * shape.n_predictors() + p];
          if (!hn::AllFalse(kTag, hn::Lt(best, all(gate)))) lower_columns<R>(w, x, r, p, batch);
        }
      }
    }
  }
}

/// Starts the sums of a child from its parent's.
template <int R>
void start_child(const PairShape& shape, const PairLevel& parent, const PairLevel& child, std::size_t lane,
                 std::size_t open) {
  for (std::size_t b = 0; b < shape.first_lane[open]; b += kWidth) {
    store(all(kInfinity), child.smallest + b);
    for (std::size_t r = 0; r < R; ++r) {
      store(all(parent.base_cv[r * parent.stride + lane]), child.base_cv + r * child.stride + b);
      store(all(parent.base_rss[r * parent.stride + lane]), child.base_rss + r * child.stride + b);
    }
  }
}

template <int R, bool kStore, bool kScore, bool kTally>
void make_child(PairWork& w, std::size_t level, std::size_t lane) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const PairLevel& parent = w.levels[level];
  const PairLevel& child = w.levels[level + 1];
  const std::size_t open = shape.predictor_of_lane[lane];
  const std::size_t n_open = shape.first_lane[open];
  w.path[level] = lane;
  start_child<R>(shape, parent, child, lane, open);
  for (std::size_t f = 0; f < w.n_folds; ++f) {
    const double* const fold = parent.folds + f * parent.fold_size;
    double* const out = child.folds + (kStore ? f * child.fold_size : 0);
    bring_in_columns<R>(w, parent, child, fold, out, lane, n_open);
    if (f == 0)
      bring_in_rows<R, kStore, kScore, true>(w, parent, child, fold, out, lane, open);
    else
      bring_in_rows<R, kStore, kScore, false>(w, parent, child, fold, out, lane, open);
  }
  bring_in_all_rows<R, kStore>(w, parent, child, lane, open);
  if constexpr (kScore) {
    const double* const rows = parent.all_rows + F::rows(parent.stride);
    const double* const pivot_row = rows + shape.row_offset[lane];
    const std::size_t plane = shape.row_offset.back() / 2;
    take_pairs<R, kTally>(
        w, child, level + 1, open,
        [&](std::size_t a, std::size_t b) {
          return hn::NegMulAdd(all(w.multipliers[a]), load(pivot_row + in_row(b)),
                               load(rows + shape.row_offset[a] + in_row(b)));
        },
        [&](std::size_t a, std::size_t b, Vector(&cv)[R], Vector& least) {
          const double* const cell = w.pair_scores + shape.row_offset[a] / 2 + b;
          for (std::size_t r = 0; r < R; ++r) cv[r] = load(cell + r * plane);
          least = hn::Min(least, load(cell + R * plane));
        });
  }
}

// ---- the recursion -------------------------------------------------------------------------------------------------

template <int R>
using ScoreLastPairs = void (*)(PairWork&, std::size_t, std::size_t, LastScores<R>&);

/// The function for two last predictors of these sizes, or null.
template <int R, int kRows>
ScoreLastPairs<R> score_last_pairs_of(std::size_t n_rows, std::size_t n_blocks, bool shared) {
  if constexpr (kRows > 8 || kWidth < 4) {
    return nullptr;
  } else {
    if (n_rows != kRows) return score_last_pairs_of<R, kRows + 1>(n_rows, n_blocks, shared);
    if constexpr (kRows < 8)
      if (shared) return n_blocks == 1 ? score_last_pairs<kRows, 1, R, true> : nullptr;
    if (n_blocks == 1) return score_last_pairs<kRows, 1, R, false>;
    if constexpr (kWidth == 4)
      if (n_blocks == 2) return score_last_pairs<kRows, 2, R, false>;
    return nullptr;
  }
}

template <int R, bool kTally>
struct Walk {
  PairWork& w;
  const PairShape& shape = *w.shape;
  ScoreLastPairs<R> score_last = nullptr;
  std::size_t n_last_rows = 0, n_last_blocks = 0;

  explicit Walk(PairWork& work) : w(work) {
    if (shape.n_predictors() < 2) return;
    const std::size_t n_first = shape.columns(1);
    n_last_rows = shape.columns(2) - n_first;
    n_last_blocks = (n_first + kWidth - 1) / kWidth;
    score_last = score_last_pairs_of<R, 1>(n_last_rows, n_last_blocks, shape.first_lane[1] % kLanes != 0);
  }

  void children(std::size_t level, std::size_t open, std::uint64_t largest) {
    const std::size_t picks_left = shape.most_picks - level;  // of a candidate at this level
    for (std::size_t p = 2; p < open && picks_left >= 3; ++p) {
      if (shape.size(picks_left - 1, p) > largest) continue;
      const bool has_children = p > 2 && picks_left > 3;
      for (std::size_t lane = shape.first_lane[p]; lane < shape.first_lane[p + 1] && !w.stopped; ++lane) {
        child(level, lane, p, has_children, picks_left);
        tick();
      }
    }
    close(level, open);
  }

  void child(std::size_t level, std::size_t lane, std::size_t p, bool has_children, std::size_t picks_left) {
    if (!(w.levels[level].smallest[lane] > w.smallest_pivot)) {
      // the candidates that end with it or one after it were counted above
      w.n_inseparable += (shape.size(picks_left - 1, p) - 1 - shape.columns(p)) * R;
      return;
    }
    if (p == 2 && score_last != nullptr) {
      LastScores<R> scores;
      score_last(w, level, lane, scores);
      take_last_pairs<R, kTally>(w, level, lane, scores, n_last_rows, n_last_blocks);
      return;
    }
    if constexpr (kTally) clear_node<R>(w, level + 1, p);
    if (has_children) {
      make_child<R, true, true, kTally>(w, level, lane);
      children(level + 1, p, ~std::uint64_t{0});
    } else {
      make_child<R, false, true, kTally>(w, level, lane);
      close(level + 1, p);
    }
    if constexpr (kTally) pass_up<R>(w, level, lane, p);
  }

  void close(std::size_t level, std::size_t open) {
    if constexpr (kTally) close_node<R>(w, level, open);
  }

  void tick() {
    if (w.n_scored - w.n_reported < kTickCandidates) return;
    add_pairs_of_bins(w);
    if (w.sink->tick(w.n_scored - w.n_reported)) w.stopped = true;
    w.n_reported = w.n_scored;
  }
};

template <int R, bool kTally>
void score_singles_of(PairWork& w) {
  const PairShape& shape = *w.shape;
  const PairLevel& root = w.levels[0];
  PairTally& t = w.tally;
  w.n_scored += shape.columns(shape.n_predictors()) * R;
  for (std::size_t p = 0; p < shape.n_predictors(); ++p) {
    for (std::size_t b = shape.first_lane[p] / kWidth * kWidth; b < shape.first_lane[p + 1]; b += kWidth) {
      const std::size_t first = std::max(b, shape.first_lane[p]);
      const unsigned inside = inside_bits(shape, p + 1, b) & ~first_bits(first - b);
      const auto keep = mask_of(inside);
      Vector cv[R];
      Vector rss[R];
      for (std::size_t r = 0; r < R; ++r) {
        cv[r] = hn::IfThenElse(keep, at_least_zero(load(root.base_cv + r * root.stride + b)), all(kInfinity));
        rss[r] = hn::IfThenElse(keep, at_least_zero(load(root.base_rss + r * root.stride + b)), all(kInfinity));
      }
      set_aside<R>(w, inside, load(root.smallest + b), cv, rss);
      HWY_ALIGN double cv_scores[R][kLanes];
      HWY_ALIGN double rss_scores[R][kLanes];
      Batch<R> batch{{0, PairSink::kNone, 1, 0, b},
                     kTally ? w.summary_factor[w.outer_columns + 1] : 1.0,
                     1,
                     1,
                     {},
                     {},
                     0,
                     0,
                     {},
                     {}};
      for (std::size_t r = 0; r < R; ++r) {
        store(cv[r], cv_scores[r]);
        store(rss[r], rss_scores[r]);
        batch.cv[r] = cv_scores[r];
        batch.rss[r] = rss_scores[r];
        batch.least_cv[r] = cv[r];
        batch.least_rss[r] = rss[r];
      }
      take<R, kTally>(w, batch);
      if constexpr (kTally) {
        for (std::size_t r = 0; r < R; ++r) {
          count_in_histogram(w, r, cv[r]);
          const Vector best[2] = {cv[r], hn::Mul(rss[r], all(batch.factor))};
          for (int x = 0; x < 2; ++x) {
            lower(t.best_lane[x] + lane_cell(w, r, b), best[x]);
            lower(t.best_group[x] + group_cell(w, 0, p, r), best[x]);
            lower(t.best_picks[x] + picks_cell(w, r, 1), best[x]);
            for (std::size_t q = 0; q < p; ++q) lower(t.best_absent[x] + absent_cell(w, r, q), best[x]);
          }
        }
      }
    }
  }
}

template <int R, bool kTally>
void score_stored_pairs(PairWork& w, std::size_t level, std::size_t open) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const PairLevel& node = w.levels[level];
  take_pairs<R, kTally>(
      w, node, level, open,
      [&](std::size_t a, std::size_t b) {
        return load(node.all_rows + F::rows(node.stride) + shape.row_offset[a] + in_row(b));
      },
      [&](std::size_t a, std::size_t b, Vector(&cv)[R], Vector& least) {
        for (std::size_t r = 0; r < R; ++r) cv[r] = hn::Zero(kTag);
        for (std::size_t f = 0; f < w.n_folds; ++f) {
          const double* const fold = node.folds + f * node.fold_size;
          const double* const row = fold + F::rows(node.stride) + shape.row_offset[a] + in_row(b);
          Vector ya_b[R];
          Vector yu_b[R];
          for (std::size_t r = 0; r < R; ++r) {
            ya_b[r] = load(fold + F::ya(r, b));
            yu_b[r] = load(fold + F::yu(r, b));
          }
          add_pair<R>(load(row), load(row + kLanes), all(fold[F::inverse(a)]), all(fold[F::v(a)]),
                      RowValues{fold + F::my(0, a), kLanes}, RowValues{fold + F::hy(0, a), kLanes},
                      load(fold + F::a(b)), load(fold + F::v(b)), ya_b, yu_b, least, cv);
        }
      });
}

template <int R>
void complete_root_of(PairWork& w) {
  using F = FoldFields<R>;
  const PairShape& shape = *w.shape;
  const PairLevel& root = w.levels[0];
  const std::size_t n = padded(shape.n_lanes());
  for (std::size_t b = 0; b < n; b += kWidth) {
    store(all(kInfinity), root.smallest + b);
    for (std::size_t f = 0; f < w.n_folds; ++f) {
      double* const fold = root.folds + f * root.fold_size;
      const Vector a = load(fold + F::a(b));
      lower(root.smallest + b, a);
      derive_columns<R>(fold, b, a, root.base_cv, root.stride);
    }
    lower(root.smallest + b, load(root.all_rows + F::a(b)));
    derive_all_rows<R>(root.all_rows, b, root.base_rss, root.stride);
  }
}

// ---- by number of responses and with or without tallies
// --------------------------------------------------------------

template <class Call>
void with_responses(std::size_t n, const Call& call) {
  switch (n) {
    case 1:
      return call(std::integral_constant<int, 1>());
    case 2:
      return call(std::integral_constant<int, 2>());
    case 3:
      return call(std::integral_constant<int, 3>());
    default:
      return call(std::integral_constant<int, 4>());
  }
}

template <class Call>
void with_options(const PairWork& w, const Call& call) {
  with_responses(w.n_responses, [&](auto responses) {
    if (w.tally.wanted)
      call(responses, std::true_type());
    else
      call(responses, std::false_type());
  });
}

void complete_root_here(PairWork& w) {
  with_responses(w.n_responses, [&](auto r) { complete_root_of<decltype(r)::value>(w); });
}
void descend_here(PairWork& w, std::size_t level, std::size_t lane) {
  with_responses(w.n_responses, [&](auto r) { make_child<decltype(r)::value, true, false, false>(w, level, lane); });
}
void score_singles_here(PairWork& w) {
  with_options(w, [&](auto r, auto tally) { score_singles_of<decltype(r)::value, decltype(tally)::value>(w); });
}
void score_pairs_here(PairWork& w, std::size_t level, std::size_t open) {
  with_options(
      w, [&](auto r, auto tally) { score_stored_pairs<decltype(r)::value, decltype(tally)::value>(w, level, open); });
}
void count_here(PairWork& w) { add_pairs_of_bins(w); }
void open_node_here(PairWork& w, std::size_t level, std::size_t open) {
  with_responses(w.n_responses, [&](auto r) { clear_node<decltype(r)::value>(w, level, open); });
}
void walk_children_here(PairWork& w, std::size_t level, std::size_t open, std::uint64_t largest) {
  with_options(w, [&](auto r, auto tally) {
    Walk<decltype(r)::value, decltype(tally)::value>(w).children(level, open, largest);
  });
}

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE

namespace formsieve::search {

HWY_EXPORT(complete_root_here);
HWY_EXPORT(descend_here);
HWY_EXPORT(score_singles_here);
HWY_EXPORT(score_pairs_here);
HWY_EXPORT(count_here);
HWY_EXPORT(open_node_here);
HWY_EXPORT(walk_children_here);

void complete_root(PairWork& work) { HWY_DYNAMIC_DISPATCH(complete_root_here)(work); }
void descend(PairWork& work, std::size_t level, std::size_t lane) {
  HWY_DYNAMIC_DISPATCH(descend_here)(work, level, lane);
}
void score_singles(PairWork& work) { HWY_DYNAMIC_DISPATCH(score_singles_here)(work); }
void score_pairs(PairWork& work, std::size_t level, std::size_t open) {
  HWY_DYNAMIC_DISPATCH(score_pairs_here)(work, level, open);
}
void add_histogram(PairWork& work) { HWY_DYNAMIC_DISPATCH(count_here)(work); }
void open_node(PairWork& work, std::size_t level, std::size_t open) {
  HWY_DYNAMIC_DISPATCH(open_node_here)(work, level, open);
}
void walk_children(PairWork& work, std::size_t level, std::size_t open, std::uint64_t largest) {
  HWY_DYNAMIC_DISPATCH(walk_children_here)(work, level, open, largest);
}

}  // namespace formsieve::search

#endif

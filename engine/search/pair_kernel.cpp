#include "search/pair_kernel.hpp"

#include "base/simd_targets.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <type_traits>

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
HWY_INLINE void lower(double* cell, Vector v) { store(hn::Min(load(cell), v), cell); }
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

// ---- what one vector of scores means -------------------------------------------------------------------------------

/// The candidates of one vector: the path, a row's lane, and the lanes from `first_lane` on.
struct Place {
  std::size_t level;   ///< lanes on the path
  std::size_t row;     ///< PairSink::kNone for single columns
  std::size_t picks;   ///< of the candidate
  std::size_t node;    ///< whose tally they belong to
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
  for (std::size_t level = 0; level <= shape.most_picks; ++level) scale(w.tally.weight_node + node_cell(w, level, r), kCell);
}

HWY_NOINLINE void add_weights(PairWork& w, const Place& at, std::size_t r, Vector penalised) {
  const auto wanted = hn::Le(penalised, all(w.weight_limit[r]));
  const Vector floor = all(2.0 * kExactFit * w.half_n);
  const auto log_weight = [&] {
    const Vector x = hn::Div(hn::Max(penalised, floor), all(w.weight_unit[r]));
    return hn::IfThenElse(wanted, hn::Mul(all(-w.half_n), hn::Log(kTag, x)), all(-kInfinity));
  };
  Vector logs = log_weight();
  if (!hn::AllFalse(kTag, hn::Gt(logs, all(kLargestLogWeight)))) {
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

HWY_INLINE void count_in_histogram(std::uint64_t* histogram, Vector cv, unsigned lanes) {
  const hn::RebindToSigned<Tag> integers;
  // eight bins to an octave: exponent and the first three bits of the fraction, from 2^−40 on
  const auto bin = hn::Sub(hn::ShiftRight<49>(hn::BitCast(integers, cv)), hn::Set(integers, (1023 - 40) * 8));
  const auto within = hn::Min(hn::Max(bin, hn::Zero(integers)), hn::Set(integers, Summary::kBins - 1));
  HWY_ALIGN std::int64_t bins[kLanes];
  hn::StoreU(within, integers, bins);
  for (; lanes != 0; lanes &= lanes - 1) ++histogram[bins[__builtin_ctz(lanes)]];
}

/// Takes the scores of one vector: lists, tallies, counts. `inside` has a bit for each lane that is a candidate.
/// What is inseparable or outside comes back as infinity.
template <int R, bool kTally>
HWY_INLINE void account(PairWork& w, const Place& at, unsigned inside, Vector smallest, Vector (&cv)[R],
                        Vector (&rss)[R], double factor, Vector (&penalised)[R]) {
  const Vector infinite = all(kInfinity);
  unsigned valid = inside;
  // true also for what is not a number
  unsigned bad = ~bits_of(hn::Gt(smallest, all(w.smallest_pivot))) & inside;
  for (int r = 0; r < R; ++r) {
    cv[r] = hn::Max(cv[r], hn::Zero(kTag));
    rss[r] = hn::Max(rss[r], hn::Zero(kTag));
  }
  if (HWY_UNLIKELY(bad != 0)) {
    w.n_inseparable += static_cast<std::uint64_t>(__builtin_popcount(bad)) * R;
    valid &= ~bad;
  }
  w.n_scored += static_cast<std::uint64_t>(__builtin_popcount(valid)) * R;
  constexpr unsigned kAll = (1U << kWidth) - 1;
  if (valid != kAll) {
    uint8_t bits[8] = {static_cast<uint8_t>(valid)};
    const auto keep = hn::LoadMaskBits(kTag, bits);
    for (int r = 0; r < R; ++r) {
      cv[r] = hn::IfThenElse(keep, cv[r], infinite);
      rss[r] = hn::IfThenElse(keep, rss[r], infinite);
    }
  }
  const std::size_t k = w.outer_columns + at.picks;
  for (int r = 0; r < R; ++r) {
    const auto hits = hn::Or(hn::Le(cv[r], all(w.limit_cv[r])), hn::Le(rss[r], all(w.limit_rss[k * R + r])));
    if (HWY_UNLIKELY(!hn::AllFalse(kTag, hits))) {
      const unsigned mask = bits_of(hits) & valid;
      if (mask != 0) offer(w, at, static_cast<std::size_t>(r), mask, cv[r], rss[r]);
    }
  }
  if constexpr (kTally) {
    for (int r = 0; r < R; ++r) {
      penalised[r] = hn::Mul(rss[r], all(factor));
      if (HWY_UNLIKELY(!hn::AllFalse(kTag, hn::Le(penalised[r], all(w.weight_limit[r])))))
        add_weights(w, at, static_cast<std::size_t>(r), penalised[r]);
      count_in_histogram(w.tally.histogram + static_cast<std::size_t>(r) * Summary::kBins, cv[r], valid);
    }
  }
}

// ---- bringing in a column ------------------------------------------------------------------------------------------

/// The column that is brought in, in one fold.
template <int R>
struct Pivot {
  HWY_INLINE Pivot(const double* fold, const FoldOffsets& at, const PairShape& shape, std::size_t lane)
      : a_row(fold + at.rows() + shape.row_offset[lane]),
        u_row(a_row + shape.row_length[lane]),
        inverse(all(fold[at.inverse() + lane])),
        v(all(fold[at.v() + lane])),
        two_v(all(2.0 * fold[at.v() + lane])) {
    for (int r = 0; r < R; ++r) {
      my[r] = all(fold[at.my(static_cast<std::size_t>(r)) + lane]);
      hy[r] = all(fold[at.hy(static_cast<std::size_t>(r)) + lane]);
    }
  }
  const double* a_row;
  const double* u_row;
  Vector inverse, v, two_v;
  Vector my[R], hy[R];
};

/// A vector of open columns after the pivot.
template <int R>
struct Open {
  HWY_INLINE Open(const Pivot<R>& pivot, const double* fold, const FoldOffsets& at, std::size_t lane)
      : a_pivot(load(pivot.a_row + lane)), u_pivot(load(pivot.u_row + lane)), m(hn::Mul(a_pivot, pivot.inverse)) {
    const Vector t = hn::MulSub(m, pivot.v, u_pivot);
    a = hn::NegMulAdd(m, a_pivot, load(fold + at.a() + lane));
    v = hn::MulAdd(m, t, load(fold + at.v() + lane));
    for (int r = 0; r < R; ++r) {
      const auto i = static_cast<std::size_t>(r);
      ya[r] = hn::NegMulAdd(pivot.my[r], a_pivot, load(fold + at.ya(i) + lane));
      yu[r] = hn::NegMulAdd(m, pivot.hy[r], hn::NegMulAdd(pivot.my[r], u_pivot, load(fold + at.yu(i) + lane)));
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
                         Vector (&sum)[R]) {
  const Vector m = hn::Mul(ra, inverse_a);
  const Vector d = hn::NegMulAdd(m, ra, a_b);
  const Vector v = hn::MulAdd(m, hn::MulSub(m, v_a, ua), v_b);
  smallest = hn::Min(smallest, d);
  Vector inverse = d;
  if constexpr (R > 1) inverse = hn::Div(all(1.0), d);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector b = hn::NegMulAdd(my_a(r), ra, ya_b[r]);
    const Vector beta = R > 1 ? hn::Mul(b, inverse) : hn::Div(b, d);
    const Vector u = hn::NegMulAdd(m, hy_a(r), hn::NegMulAdd(my_a(r), ua, yu_b[r]));
    sum[r] = hn::MulAdd(beta, hn::MulSub(beta, v, u), sum[r]);
  }
}

/// A pair in the matrix of all rows.
template <int R, class RowOf>
HWY_INLINE void pair_rss(Vector ra, Vector inverse_a, const RowOf& my_a, Vector a_b, const Vector (&ya_b)[R],
                         Vector& smallest, Vector (&rss)[R]) {
  const Vector d = hn::NegMulAdd(hn::Mul(ra, inverse_a), ra, a_b);
  smallest = hn::Min(smallest, d);
  Vector inverse = d;
  if constexpr (R > 1) inverse = hn::Div(all(1.0), d);
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
  const std::size_t of_first = shape.n_columns[1];
  if (lane < shape.first_lane[1]) bits &= lane < of_first ? first_bits(of_first - lane) : 0U;
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

/// The pairs of one row predictor, by lane in row_best: every other open predictor below it is absent from those in
/// whose lanes it does not stand.
template <int R>
void close_row_predictor(PairWork& w, std::size_t level, std::size_t predictor, std::size_t picks) {
  const PairShape& shape = *w.shape;
  PairTally& t = w.tally;
  const std::size_t n = shape.first_lane[predictor];
  for (int x = 0; x < 2; ++x) {
    for (std::size_t r = 0; r < R; ++r) {
      const double* lanes = t.row_best[x] + lane_cell(w, r, 0);
      Vector best = all(kInfinity);
      for (std::size_t b = 0; b < n; b += kWidth) {
        const Vector v = load(lanes + b);
        lower(t.best_lane[x] + lane_cell(w, r, b), v);
        best = hn::Min(best, v);
      }
      lower(t.best_group[x] + group_cell(w, level, predictor, r), best);
      lower(t.best_picks[x] + picks_cell(w, r, picks), best);
      if (predictor < 2) continue;
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
        cell = std::min(cell, p == first_at ? second : first);
      }
    }
  }
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

// ---- the child whose two open predictors are the last: everything in registers --------------------------------------

template <int kRows, int kBlocks, int R, bool kTally>
HWY_NOINLINE void last_pairs(PairWork& w, std::size_t level, std::size_t lane) {
  const PairShape& shape = *w.shape;
  const PairLevel& parent = w.levels[level];
  const FoldOffsets at{parent.stride, R};
  constexpr std::size_t kRowVectors = (kRows + kWidth - 1) / kWidth;
  constexpr std::size_t kRowLanes = kRowVectors * kWidth;
  const std::size_t first_row = shape.first_lane[1];
  const std::size_t row_length = shape.row_length[first_row];
  const std::size_t rows_at = at.rows() + shape.row_offset[first_row];

  HWY_ALIGN double m[kRowLanes], h[kRowLanes], inverse[kRowLanes], v[kRowLanes], row_smallest[kRowLanes];
  HWY_ALIGN double my[R][kRowLanes], hy[R][kRowLanes], base[R][kRowLanes], base_rss[R][kRowLanes];
  Vector sum[kRows][kBlocks][R];
  Vector smallest[kRows][kBlocks];
  for (int i = 0; i < kRows; ++i)
    for (int b = 0; b < kBlocks; ++b) {
      smallest[i][b] = all(kInfinity);
      for (int r = 0; r < R; ++r) sum[i][b][r] = hn::Zero(kTag);
    }
  for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
    store(all(kInfinity), row_smallest + i);
    for (std::size_t r = 0; r < R; ++r) {
      store(all(parent.base_cv[r * at.stride + lane]), base[r] + i);
      store(all(parent.base_rss[r * at.stride + lane]), base_rss[r] + i);
    }
  }
  const std::size_t n_folds = w.n_folds;
  const std::size_t fold_size = parent.fold_size;
  const double* fold = parent.folds;
  for (std::size_t f = 0; f < n_folds; ++f, fold += fold_size) {
    const Pivot<R> pivot(fold, at, shape, lane);
    for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
      const Open<R> row(pivot, fold, at, first_row + i);
      store(row.m, m + i);
      store(row.h(pivot), h + i);
      store(row.v, v + i);
      lower(row_smallest + i, row.a);
      const Vector inverse_i = hn::Div(all(1.0), row.a);
      store(inverse_i, inverse + i);
      for (int r = 0; r < R; ++r) {
        const Derived derived = derive(row.ya[r], row.yu[r], row.v, inverse_i);
        store(derived.my, my[r] + i);
        store(derived.hy, hy[r] + i);
        increase(base[r] + i, derived.change);
      }
    }
    const double* const rows = fold + rows_at;
    HWY_UNROLL(2)
    for (int b = 0; b < kBlocks; ++b) {
      const Open<R> last(pivot, fold, at, static_cast<std::size_t>(b) * kWidth);
      HWY_UNROLL(8)
      for (int i = 0; i < kRows; ++i) {
        const double* const row = rows + 2 * row_length * static_cast<std::size_t>(i) + static_cast<std::size_t>(b) * kWidth;
        const Vector m_i = all(m[i]);
        const Vector ra = hn::NegMulAdd(m_i, last.a_pivot, load(row));
        const Vector ua = hn::NegMulAdd(all(h[i]), last.m, hn::NegMulAdd(m_i, last.u_pivot, load(row + row_length)));
        add_pair<R>(ra, ua, all(inverse[i]), all(v[i]), RowValues{my[0] + i, kRowLanes}, RowValues{hy[0] + i, kRowLanes},
                    last.a, last.v, last.ya, last.yu, smallest[i][b], sum[i][b]);
      }
    }
  }

  // all rows
  const double* const everything = parent.all_rows;
  const double* const pivot_row = everything + at.rows() + shape.row_offset[lane];
  const Vector pivot_inverse = all(everything[at.inverse() + lane]);
  Vector pivot_my[R];
  for (int r = 0; r < R; ++r) pivot_my[r] = all(everything[at.my(static_cast<std::size_t>(r)) + lane]);
  for (std::size_t i = 0; i < kRowLanes; i += kWidth) {
    const Vector a_pivot = load(pivot_row + first_row + i);
    const Vector m_i = hn::Mul(a_pivot, pivot_inverse);
    const Vector a = hn::NegMulAdd(m_i, a_pivot, load(everything + at.a() + first_row + i));
    const Vector inverse_i = hn::Div(all(1.0), a);
    store(m_i, m + i);
    store(inverse_i, inverse + i);
    lower(row_smallest + i, a);
    for (int r = 0; r < R; ++r) {
      const Vector ya =
          hn::NegMulAdd(pivot_my[r], a_pivot, load(everything + at.ya(static_cast<std::size_t>(r)) + first_row + i));
      const Vector my_i = hn::Mul(ya, inverse_i);
      store(my_i, my[r] + i);
      store(hn::NegMulAdd(my_i, ya, load(base_rss[r] + i)), base_rss[r] + i);
    }
  }

  const std::size_t picks = level + 3;
  const double factor = kTally ? w.summary_factor[w.outer_columns + picks] : 1.0;
  const std::size_t of_first = shape.n_columns[1];
  PairTally& t = w.tally;
  w.path[level] = lane;
  if constexpr (kTally)
    for (std::size_t r = 0; r < R; ++r) store(hn::Zero(kTag), t.weight_node + node_cell(w, level + 1, r));
  Vector node_best[2][R];
  for (int r = 0; r < R; ++r) node_best[0][r] = node_best[1][r] = all(kInfinity);
  for (int b = 0; b < kBlocks; ++b) {
    const std::size_t first_lane = static_cast<std::size_t>(b) * kWidth;
    const unsigned inside = first_bits(of_first - first_lane);
    const Vector a_pivot = load(pivot_row + first_lane);
    const Vector a_b = hn::NegMulAdd(hn::Mul(a_pivot, pivot_inverse), a_pivot, load(everything + at.a() + first_lane));
    Vector ya_b[R];
    Vector lane_best[2][R];
    for (int r = 0; r < R; ++r) {
      ya_b[r] = hn::NegMulAdd(pivot_my[r], a_pivot, load(everything + at.ya(static_cast<std::size_t>(r)) + first_lane));
      lane_best[0][r] = lane_best[1][r] = all(kInfinity);
    }
    for (int i = 0; i < kRows; ++i) {
      const double* const row = everything + rows_at + 2 * row_length * static_cast<std::size_t>(i) + first_lane;
      const Vector ra = hn::NegMulAdd(all(m[i]), a_pivot, load(row));
      Vector cv[R];
      Vector rss[R];
      Vector penalised[R];
      for (int r = 0; r < R; ++r) {
        cv[r] = hn::Add(sum[i][b][r], all(base[r][i]));
        rss[r] = all(base_rss[r][i]);
      }
      Vector least = hn::Min(smallest[i][b], all(row_smallest[i]));
      pair_rss<R>(ra, all(inverse[i]), RowValues{my[0] + i, kRowLanes}, a_b, ya_b, least, rss);
      const std::size_t row_lane = first_row + static_cast<std::size_t>(i);
      account<R, kTally>(w, {level + 1, row_lane, picks, level + 1, first_lane}, inside, least, cv, rss, factor,
                         penalised);
      if constexpr (kTally) {
        for (int r = 0; r < R; ++r) {
          lower(t.best_column[0] + column_cell(w, static_cast<std::size_t>(r), row_lane), cv[r]);
          lower(t.best_column[1] + column_cell(w, static_cast<std::size_t>(r), row_lane), penalised[r]);
          lane_best[0][r] = hn::Min(lane_best[0][r], cv[r]);
          lane_best[1][r] = hn::Min(lane_best[1][r], penalised[r]);
        }
      }
    }
    if constexpr (kTally) {
      for (int r = 0; r < R; ++r)
        for (int x = 0; x < 2; ++x) {
          lower(t.best_lane[x] + lane_cell(w, static_cast<std::size_t>(r), first_lane), lane_best[x][r]);
          node_best[x][r] = hn::Min(node_best[x][r], lane_best[x][r]);
        }
    }
  }
  if constexpr (kTally) {
    for (std::size_t r = 0; r < R; ++r)
      for (int x = 0; x < 2; ++x) {
        store(node_best[x][r], t.best_node[x] + node_cell(w, level + 1, r));
        lower(t.best_picks[x] + picks_cell(w, r, picks), node_best[x][r]);
      }
    pass_up<R>(w, level, lane, shape.predictor_of_lane[lane]);
  }
}

// ---- any child -----------------------------------------------------------------------------------------------------

/// Columns from the second predictor on may be rows or be picked: their inverses, multipliers and bases.
template <int R>
HWY_INLINE void derive_columns(double* fold, const FoldOffsets& at, std::size_t lane, Vector a, double* base_cv) {
  const Vector inverse = hn::Div(all(1.0), a);
  store(inverse, fold + at.inverse() + lane);
  const Vector v = load(fold + at.v() + lane);
  for (std::size_t r = 0; r < R; ++r) {
    const Derived derived = derive(load(fold + at.ya(r) + lane), load(fold + at.yu(r) + lane), v, inverse);
    store(derived.my, fold + at.my(r) + lane);
    store(derived.hy, fold + at.hy(r) + lane);
    increase(base_cv + r * at.stride + lane, derived.change);
  }
}

template <int R>
HWY_INLINE void derive_all_rows(double* everything, const FoldOffsets& at, std::size_t lane, double* base_rss) {
  const Vector inverse = hn::Div(all(1.0), load(everything + at.a() + lane));
  store(inverse, everything + at.inverse() + lane);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector ya = load(everything + at.ya(r) + lane);
    const Vector my = hn::Mul(ya, inverse);
    store(my, everything + at.my(r) + lane);
    store(hn::NegMulAdd(my, ya, load(base_rss + r * at.stride + lane)), base_rss + r * at.stride + lane);
  }
}

/// The columns of a child in one fold, written to `out`; multipliers to the scratch.
template <int R>
void bring_in_columns(PairWork& w, const PairLevel& parent, const PairLevel& child, const double* fold, double* out,
                      std::size_t lane, std::size_t n_open) {
  const PairShape& shape = *w.shape;
  const FoldOffsets from{parent.stride, R};
  const FoldOffsets to{child.stride, R};
  const Pivot<R> pivot(fold, from, shape, lane);
  double* const m = w.multipliers;
  double* const h = m + padded(shape.n_lanes());
  const std::size_t first_row = shape.first_lane[1];
  double* const base_cv = child.base_cv;
  double* const smallest = child.smallest;
  for (std::size_t b = 0; b < n_open; b += kWidth) {
    const Open<R> open(pivot, fold, from, b);
    store(open.m, m + b);
    store(open.h(pivot), h + b);
    store(open.a, out + to.a() + b);
    store(open.v, out + to.v() + b);
    lower(smallest + b, open.a);
    for (std::size_t r = 0; r < R; ++r) {
      store(open.ya[r], out + to.ya(r) + b);
      store(open.yu[r], out + to.yu(r) + b);
    }
    if (b >= first_row) derive_columns<R>(out, to, b, open.a, base_cv);
  }
}

/// The rows of a child in one fold, scored on the way and kept where the child has children.
template <int R, bool kStore, bool kScore, bool kFirst>
void bring_in_rows(PairWork& w, const PairLevel& parent, const PairLevel& child, const double* fold, double* out,
                   std::size_t lane, std::size_t open) {
  const PairShape& shape = *w.shape;
  const FoldOffsets from{parent.stride, R};
  const FoldOffsets to{child.stride, R};
  const double* const a_row = fold + from.rows() + shape.row_offset[lane];
  const double* const u_row = a_row + shape.row_length[lane];
  const double* const rows = fold + from.rows();
  double* const new_rows = out + to.rows();
  const double* const m = w.multipliers;
  const double* const h = m + padded(shape.n_lanes());
  const std::size_t* const row_offset = shape.row_offset.data();
  const std::size_t* const row_length = shape.row_length.data();
  const std::size_t plane = shape.row_offset.back() / 2;
  double* const sums = w.pair_scores;
  const std::size_t last_row = shape.first_lane[open];
  std::size_t predictor = 1;
  for (std::size_t b = 0; b < shape.first_lane[open - 1]; b += kWidth) {
    while (shape.first_lane[predictor] <= b) ++predictor;
    const Vector a_pivot = load(a_row + b);
    const Vector u_pivot = load(u_row + b);
    const Vector m_b = load(m + b);
    const Vector a_b = load(out + to.a() + b);
    const Vector v_b = load(out + to.v() + b);
    Vector ya_b[R];
    Vector yu_b[R];
    for (std::size_t r = 0; r < R; ++r) {
      ya_b[r] = load(out + to.ya(r) + b);
      yu_b[r] = load(out + to.yu(r) + b);
    }
    HWY_UNROLL(2)
    for (std::size_t a = shape.first_lane[predictor]; a < last_row; ++a) {
      const std::size_t offset = row_offset[a] + b;
      const std::size_t u_offset = offset + row_length[a];
      const Vector m_a = all(m[a]);
      const Vector ra = hn::NegMulAdd(m_a, a_pivot, load(rows + offset));
      const Vector ua = hn::NegMulAdd(all(h[a]), m_b, hn::NegMulAdd(m_a, u_pivot, load(rows + u_offset)));
      if constexpr (kStore) {
        store(ra, new_rows + offset);
        store(ua, new_rows + u_offset);
      }
      if constexpr (kScore) {
        double* const cell = sums + row_offset[a] / 2 + b;
        Vector sum[R];
        for (std::size_t r = 0; r < R; ++r) sum[r] = kFirst ? hn::Zero(kTag) : load(cell + r * plane);
        Vector smallest = kFirst ? all(kInfinity) : load(cell + R * plane);
        add_pair<R>(
            ra, ua, all(out[to.inverse() + a]), all(out[to.v() + a]),
            RowValues{out + to.my(0) + a, to.stride}, RowValues{out + to.hy(0) + a, to.stride}, a_b, v_b, ya_b, yu_b,
            smallest, sum);
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
  const PairShape& shape = *w.shape;
  const FoldOffsets from{parent.stride, R};
  const FoldOffsets to{child.stride, R};
  const double* const everything = parent.all_rows;
  double* const out = child.all_rows;
  const double* const pivot_row = everything + from.rows() + shape.row_offset[lane];
  const Vector inverse = all(everything[from.inverse() + lane]);
  double* const m = w.multipliers;
  for (std::size_t b = 0; b < shape.first_lane[open]; b += kWidth) {
    const Vector a_pivot = load(pivot_row + b);
    const Vector m_b = hn::Mul(a_pivot, inverse);
    store(m_b, m + b);
    const Vector a = hn::NegMulAdd(m_b, a_pivot, load(everything + from.a() + b));
    store(a, out + to.a() + b);
    lower(child.smallest + b, a);
    for (std::size_t r = 0; r < R; ++r)
      store(hn::NegMulAdd(all(everything[from.my(r) + lane]), a_pivot, load(everything + from.ya(r) + b)),
            out + to.ya(r) + b);
    if (b >= shape.first_lane[1]) derive_all_rows<R>(out, to, b, child.base_rss);
  }
  if constexpr (kStore) {
    for (std::size_t a = shape.first_lane[1]; a < shape.first_lane[open]; ++a) {
      const Vector m_a = all(m[a]);
      const double* const row = everything + from.rows() + shape.row_offset[a];
      double* const new_row = out + to.rows() + shape.row_offset[a];
      for (std::size_t b = 0; b < shape.row_length[a]; b += kWidth)
        store(hn::NegMulAdd(m_a, load(pivot_row + b), load(row + b)), new_row + b);
    }
  }
}

/// Takes the pairs of a node row by row. `row_of(a, b)` gives the node's row of all rows, `scores(a, b, …)` the sums over
/// the folds without the base.
template <int R, bool kTally, class RowOf, class Scores>
void take_pairs(PairWork& w, const PairLevel& node, std::size_t level, std::size_t open, const RowOf& row_of,
                const Scores& scores) {
  const PairShape& shape = *w.shape;
  const FoldOffsets at{node.stride, R};
  const double* const everything = node.all_rows;
  const std::size_t picks = level + 2;
  const double factor = kTally ? w.summary_factor[w.outer_columns + picks] : 1.0;
  PairTally& t = w.tally;
  for (std::size_t p = 1; p < open; ++p) {
    const std::size_t n = shape.first_lane[p];
    if constexpr (kTally)
      for (std::size_t b = 0; b < n; b += kWidth)
        for (std::size_t r = 0; r < R; ++r)
          for (int x = 0; x < 2; ++x) store(all(kInfinity), t.row_best[x] + lane_cell(w, r, b));
    for (std::size_t a = n; a < shape.first_lane[p + 1]; ++a) {
      for (std::size_t b = 0; b < n; b += kWidth) {
        Vector cv[R];
        Vector rss[R];
        Vector penalised[R];
        Vector ya_b[R];
        Vector least = all(node.smallest[a]);
        scores(a, b, cv, least);
        for (std::size_t r = 0; r < R; ++r) {
          cv[r] = hn::Add(cv[r], all(node.base_cv[r * at.stride + a]));
          rss[r] = all(node.base_rss[r * at.stride + a]);
          ya_b[r] = load(everything + at.ya(r) + b);
        }
        pair_rss<R>(row_of(a, b), all(everything[at.inverse() + a]), RowValues{everything + at.my(0) + a, at.stride},
                    load(everything + at.a() + b), ya_b, least, rss);
        account<R, kTally>(w, {level, a, picks, level, b}, inside_bits(shape, p, b), least, cv, rss, factor, penalised);
        if constexpr (kTally) {
          for (std::size_t r = 0; r < R; ++r) {
            lower(t.best_column[0] + column_cell(w, r, a), cv[r]);
            lower(t.best_column[1] + column_cell(w, r, a), penalised[r]);
            lower(t.row_best[0] + lane_cell(w, r, b), cv[r]);
            lower(t.row_best[1] + lane_cell(w, r, b), penalised[r]);
          }
        }
      }
    }
    if constexpr (kTally) close_row_predictor<R>(w, level, p, picks);
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
    const FoldOffsets from{parent.stride, R};
    const double* const rows = parent.all_rows + from.rows();
    const double* const pivot_row = rows + shape.row_offset[lane];
    const std::size_t plane = shape.row_offset.back() / 2;
    take_pairs<R, kTally>(
        w, child, level + 1, open,
        [&](std::size_t a, std::size_t b) {
          return hn::NegMulAdd(all(w.multipliers[a]), load(pivot_row + b), load(rows + shape.row_offset[a] + b));
        },
        [&](std::size_t a, std::size_t b, Vector(&cv)[R], Vector& least) {
          const double* const cell = w.pair_scores + shape.row_offset[a] / 2 + b;
          for (std::size_t r = 0; r < R; ++r) cv[r] = load(cell + r * plane);
          least = hn::Min(least, load(cell + R * plane));
        });
  }
}

// ---- the recursion -------------------------------------------------------------------------------------------------

using LastPairs = void (*)(PairWork&, std::size_t, std::size_t);

/// The function for two last predictors of these sizes, or null.
template <int R, bool kTally, int kRows>
LastPairs last_pairs_of(std::size_t n_rows, std::size_t n_blocks) {
  if constexpr (kRows > 8 || kWidth < 4) {
    return nullptr;
  } else {
    if (n_rows != kRows) return last_pairs_of<R, kTally, kRows + 1>(n_rows, n_blocks);
    if (n_blocks == 1) return last_pairs<kRows, 1, R, kTally>;
    if constexpr (kWidth == 4)
      if (n_blocks == 2) return last_pairs<kRows, 2, R, kTally>;
    return nullptr;
  }
}

template <int R, bool kTally>
struct Walk {
  PairWork& w;
  const PairShape& shape = *w.shape;
  LastPairs last = nullptr;

  explicit Walk(PairWork& work) : w(work) {
    if (shape.n_predictors() < 2) return;
    const std::size_t n_first = shape.columns(1);
    last = last_pairs_of<R, kTally, 1>(shape.columns(2) - n_first, (n_first + kWidth - 1) / kWidth);
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
    if (p == 2 && last != nullptr) {
      last(w, level, lane);
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
    if (w.sink->tick(w.n_scored - w.n_reported)) w.stopped = true;
    w.n_reported = w.n_scored;
  }
};

template <int R, bool kTally>
void score_singles_of(PairWork& w) {
  const PairShape& shape = *w.shape;
  const PairLevel& root = w.levels[0];
  const double factor = kTally ? w.summary_factor[w.outer_columns + 1] : 1.0;
  PairTally& t = w.tally;
  for (std::size_t p = 0; p < shape.n_predictors(); ++p) {
    for (std::size_t b = shape.first_lane[p] / kWidth * kWidth; b < shape.first_lane[p + 1]; b += kWidth) {
      const std::size_t first = std::max(b, shape.first_lane[p]);
      unsigned inside = inside_bits(shape, p + 1, b);
      if (first > b) inside &= ~first_bits(first - b);
      Vector cv[R];
      Vector rss[R];
      Vector penalised[R];
      for (std::size_t r = 0; r < R; ++r) {
        cv[r] = load(root.base_cv + r * root.stride + b);
        rss[r] = load(root.base_rss + r * root.stride + b);
      }
      account<R, kTally>(w, {0, PairSink::kNone, 1, 0, b}, inside, load(root.smallest + b), cv, rss, factor, penalised);
      if constexpr (kTally) {
        for (std::size_t r = 0; r < R; ++r) {
          const Vector best[2] = {cv[r], penalised[r]};
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
  const PairShape& shape = *w.shape;
  const PairLevel& node = w.levels[level];
  const FoldOffsets at{node.stride, R};
  take_pairs<R, kTally>(
      w, node, level, open,
      [&](std::size_t a, std::size_t b) { return load(node.all_rows + at.rows() + shape.row_offset[a] + b); },
      [&](std::size_t a, std::size_t b, Vector(&cv)[R], Vector& least) {
        for (std::size_t r = 0; r < R; ++r) cv[r] = hn::Zero(kTag);
        for (std::size_t f = 0; f < w.n_folds; ++f) {
          const double* const fold = node.folds + f * node.fold_size;
          const double* const row = fold + at.rows() + shape.row_offset[a] + b;
          Vector ya_b[R];
          Vector yu_b[R];
          for (std::size_t r = 0; r < R; ++r) {
            ya_b[r] = load(fold + at.ya(r) + b);
            yu_b[r] = load(fold + at.yu(r) + b);
          }
          add_pair<R>(load(row), load(row + shape.row_length[a]), all(fold[at.inverse() + a]), all(fold[at.v() + a]),
                      RowValues{fold + at.my(0) + a, at.stride}, RowValues{fold + at.hy(0) + a, at.stride},
                      load(fold + at.a() + b), load(fold + at.v() + b), ya_b, yu_b, least, cv);
        }
      });
}

template <int R>
void complete_root_of(PairWork& w) {
  const PairShape& shape = *w.shape;
  const PairLevel& root = w.levels[0];
  const FoldOffsets at{root.stride, R};
  const std::size_t n = padded(shape.n_lanes());
  for (std::size_t b = 0; b < n; b += kWidth) {
    store(all(kInfinity), root.smallest + b);
    for (std::size_t f = 0; f < w.n_folds; ++f) {
      double* const fold = root.folds + f * root.fold_size;
      const Vector a = load(fold + at.a() + b);
      lower(root.smallest + b, a);
      derive_columns<R>(fold, at, b, a, root.base_cv);
    }
    lower(root.smallest + b, load(root.all_rows + at.a() + b));
    derive_all_rows<R>(root.all_rows, at, b, root.base_rss);
  }
}

// ---- by number of responses and with or without tallies --------------------------------------------------------------

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
void open_node(PairWork& work, std::size_t level, std::size_t open) {
  HWY_DYNAMIC_DISPATCH(open_node_here)(work, level, open);
}
void walk_children(PairWork& work, std::size_t level, std::size_t open, std::uint64_t largest) {
  HWY_DYNAMIC_DISPATCH(walk_children_here)(work, level, open, largest);
}

}  // namespace formsieve::search

#endif

// Any other node: made from its parent fold by fold, its pairs scored on the way.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_NODES_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_NODES_HPP
#undef FORMSIEVE_PAIR_NODES_HPP
#else
#define FORMSIEVE_PAIR_NODES_HPP
#endif

#include "search/pair_arithmetic-inl.hpp"
#include "search/pair_scores-inl.hpp"
#include "search/pair_tally-inl.hpp"

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

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
    Batch<R> batch{{level, n, picks, level, 0},
                   factor,
                   n_forms * shape.n_columns[p],
                   n_forms,
                   (n + kWidth - 1) / kWidth,
                   {},
                   {},
                   padded(n),
                   kWidth,
                   {},
                   {},
                   {}};
    for (std::size_t r = 0; r < R; ++r) {
      batch.cv[r] = cv_plane + r * plane + first;
      batch.rss[r] = rss_plane + r * plane + first;
      batch.least_cv[r] = batch.least_rss[r] = all(kInfinity);
      batch.greatest_cv[r] = hn::Zero(kTag);
    }
    bool some_aside = false;
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
        if (HWY_UNLIKELY(!all_separable(w, least))) {
          set_aside<R>(w, inside_bits(shape, p, b), least, cv, rss);
          some_aside = true;
        }
        for (std::size_t r = 0; r < R; ++r) {
          store(cv[r], cv_plane + r * plane + shape.row_offset[a] / 2 + b);
          store(rss[r], rss_plane + r * plane + shape.row_offset[a] / 2 + b);
          batch.least_cv[r] = hn::Min(batch.least_cv[r], cv[r]);
          batch.least_rss[r] = hn::Min(batch.least_rss[r], rss[r]);
          if constexpr (kTally)
            batch.greatest_cv[r] =
                hn::Max(batch.greatest_cv[r], hn::IfThenElseZero(hn::Lt(cv[r], all(kInfinity)), cv[r]));
        }
      }
    }
    if (some_aside)
      for (std::size_t r = 0; r < R; ++r) batch.greatest_cv[r] = all(kInfinity);
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

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

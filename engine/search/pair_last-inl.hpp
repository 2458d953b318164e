// The node whose two open predictors are the last, where most candidates are: everything in registers.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_LAST_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_LAST_HPP
#undef FORMSIEVE_PAIR_LAST_HPP
#else
#define FORMSIEVE_PAIR_LAST_HPP
#endif

#include "search/pair_arithmetic-inl.hpp"
#include "search/pair_scores-inl.hpp"
#include "search/pair_tally-inl.hpp"

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

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
  batch.n_candidates = n_rows * shape.n_columns[1];
  batch.n_rows = n_rows;
  batch.n_blocks = n_blocks;
  batch.row_stride = n_blocks * kWidth;
  batch.block_stride = kWidth;
  const auto first_block = hn::FirstN(kTag, shape.n_columns[1]);
  for (std::size_t r = 0; r < R; ++r) {
    batch.cv[r] = scores.cv[r];
    batch.rss[r] = scores.rss[r];
    batch.least_cv[r] = batch.least_rss[r] = all(kInfinity);
    batch.greatest_cv[r] = hn::Zero(kTag);
    for (std::size_t i = 0; i < n_rows * n_blocks; ++i) {
      batch.least_cv[r] = hn::Min(batch.least_cv[r], load(scores.cv[r] + i * kWidth));
      batch.least_rss[r] = hn::Min(batch.least_rss[r], load(scores.rss[r] + i * kWidth));
      if constexpr (kTally) {
        const auto inside = n_blocks == 1 ? first_block : hn::FirstN(kTag, shape.n_columns[1] - i % n_blocks * kWidth);
        batch.greatest_cv[r] =
            hn::Max(batch.greatest_cv[r], hn::IfThenElseZero(inside, load(scores.cv[r] + i * kWidth)));
      }
    }
  }
  if constexpr (kTally)
    for (std::size_t r = 0; r < R; ++r) store(hn::Zero(kTag), w.tally.weight_node + node_cell(w, level + 1, r));
  const bool weighed = take<R, kTally>(w, batch);
  if constexpr (kTally) {
    PairTally& t = w.tally;
    for (std::size_t r = 0; r < R; ++r) {
      const Vector node_best[2] = {batch.least_cv[r], hn::Mul(batch.least_rss[r], all(batch.factor))};
      for (int x = 0; x < 2; ++x) {
        store(node_best[x], t.best_node[x] + node_cell(w, level + 1, r));
        lower(t.best_picks[x] + picks_cell(w, r, picks), node_best[x]);
        if (HWY_UNLIKELY(!hn::AllFalse(kTag, hn::Lt(node_best[x], all(t.gate_last[x][r])))))
          lower_last_columns(w, x, r, x == 0 ? scores.cv[r] : scores.rss[r], x == 0 ? 1.0 : batch.factor, n_rows,
                             n_blocks);
      }
    }
    pass_up<R>(w, level, lane, shape.predictor_of_lane[lane], weighed);
  }
}

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

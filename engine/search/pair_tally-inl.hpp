// The tallies of a node: what its best scores say of the forms, and of the absence, of predictors.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_TALLY_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_TALLY_HPP
#undef FORMSIEVE_PAIR_TALLY_HPP
#else
#define FORMSIEVE_PAIR_TALLY_HPP
#endif

#include "search/pair_vectors-inl.hpp"

#include <algorithm>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

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
HWY_INLINE void pass_up(PairWork& w, std::size_t level, std::size_t lane, std::size_t predictor, bool weighed = true) {
  PairTally& t = w.tally;
  for (std::size_t r = 0; r < R; ++r) {
    for (int x = 0; x < 2; ++x) {
      const Vector best = load(t.best_node[x] + node_cell(w, level + 1, r));
      lower(t.best_column[x] + column_cell(w, r, lane), best);
      lower(t.best_group[x] + group_cell(w, level, predictor, r), best);
    }
    if (!weighed) continue;
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

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

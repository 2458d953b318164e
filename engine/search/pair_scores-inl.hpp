// What becomes of scores: they are shown to the lists, weighed and counted.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_SCORES_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_SCORES_HPP
#undef FORMSIEVE_PAIR_SCORES_HPP
#else
#define FORMSIEVE_PAIR_SCORES_HPP
#endif

#include "search/pair_vectors-inl.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstdint>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

/// A mean squared residual below this share of the response's variance is rounding: weights treat it as this much.
constexpr double kExactFit = 1e-28;

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
  w.weight_unit[r] *= std::exp(-2.0 * log_weight / static_cast<double>(w.n_rows));
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

/// x^(−n/2) for lanes of x, by repeated squaring: the relative error is about n units of the last place, far below
/// what the sums leave out.
HWY_INLINE Vector weights_of(const PairWork& w, Vector x) {
  const bool odd = w.n_rows % 2 != 0;
  Vector square = reciprocal(odd ? hn::Sqrt(x) : x);
  Vector weight = all(1.0);
  for (std::uint64_t power = odd ? w.n_rows : w.n_rows / 2; power != 0; power >>= 1) {
    if (power & 1) weight = hn::Mul(weight, square);
    square = hn::Mul(square, square);
  }
  return weight;
}

/// Shows lanes to the lists.
HWY_NOINLINE void offer(PairWork& w, const Place& at, std::size_t r, unsigned mask, Vector cv, Vector rss) {
  HWY_ALIGN double cv_lanes[kLanes];
  HWY_ALIGN double rss_lanes[kLanes];
  store(cv, cv_lanes);
  store(rss, rss_lanes);
  w.sink->offer(r, at.level, at.row, at.first_lane, mask, cv_lanes, rss_lanes);
}

constexpr int kLowBits = 50;  ///< four bins to an octave: all bits but the exponent and the first two of the fraction

/// Counts the candidates of a vector from an edge on.
HWY_NOINLINE void count_one_by_one(PairWork& w, std::size_t r, Vector cv, Vector from) {
  std::uint64_t* const bins = w.tally.histogram + r * Summary::kBins;
  HWY_ALIGN double lanes[kLanes];
  store(cv, lanes);
  unsigned wanted = bits_of(hn::And(hn::Ge(cv, from), hn::Lt(cv, all(kInfinity))));
  for (; wanted != 0; wanted &= wanted - 1) {
    const auto bits = std::bit_cast<std::int64_t>(lanes[__builtin_ctz(wanted)]);
    const std::int64_t bin = (bits >> kLowBits) - w.tally.first_bin[r];
    ++bins[std::clamp<std::int64_t>(bin, 0, Summary::kBins - 1)];
  }
}

/// The scores of the pairs of one row predictor (or of the single columns) at a node, before they are taken: vectors of
/// held-out SSE and RSS, lanes that are no candidates infinite.
template <int R>
struct Batch {
  Place at;                  ///< of the first vector
  double factor;             ///< penalised RSS = RSS · factor
  std::size_t n_candidates;  ///< lanes that are candidates, inseparable ones included
  std::size_t n_rows;        ///< vectors stand row by row …
  std::size_t n_blocks;      ///< … and block by block of kWidth lanes
  const double* cv[R];
  const double* rss[R];
  std::size_t row_stride, block_stride;  ///< between vectors, in numbers
  Vector least_cv[R], least_rss[R];      ///< minima over the vectors
  Vector greatest_cv[R];                 ///< with tallies: maxima over the lanes that are candidates
};

/// Adds the weights of a batch that matter: to its lanes, its rows' columns, its number of picks and its node.
template <int R>
HWY_NOINLINE void add_weights(PairWork& w, std::size_t r, const Batch<R>& batch) {
  PairTally& t = w.tally;
  const double floor = kExactFit * static_cast<double>(w.n_rows);
  const double least = std::max(hn::GetLane(hn::MinOfLanes(kTag, batch.least_rss[r])) * batch.factor, floor);
  if (HWY_UNLIKELY(least < w.weight_overflow * w.weight_unit[r]))
    rescale_weights(w, r, -0.5 * static_cast<double>(w.n_rows) * std::log(least / w.weight_unit[r]));
  const Vector limit = all(w.weight_range);
  const Vector factor = all(batch.factor / w.weight_unit[r]);
  const Vector smallest = all(floor / w.weight_unit[r]);
  Vector of_node = hn::Zero(kTag);
  for (std::size_t i = 0; i < batch.n_rows; ++i) {
    Vector of_row = hn::Zero(kTag);
    for (std::size_t b = 0; b < batch.n_blocks; ++b) {
      const Vector x = hn::Mul(load(batch.rss[r] + i * batch.row_stride + b * batch.block_stride), factor);
      const auto matters = hn::Le(x, limit);
      if (hn::AllFalse(kTag, matters)) continue;
      const Vector weights = hn::IfThenElseZero(matters, weights_of(w, hn::Max(hn::Min(x, limit), smallest)));
      increase(t.weight_lane + lane_cell(w, r, batch.at.first_lane + b * kWidth), weights);
      of_row = hn::Add(of_row, weights);
    }
    if (batch.at.row != PairSink::kNone) increase(t.weight_column + column_cell(w, r, batch.at.row + i), of_row);
    of_node = hn::Add(of_node, of_row);
  }
  increase(t.weight_picks + picks_cell(w, r, batch.at.picks), of_node);
  increase(t.weight_node + node_cell(w, batch.at.node, r), of_node);
}

/// Counts the candidates of a batch by bin. Most batches lie in one bin; a few more are counted by comparing with the
/// bins' upper edges in turn, and what spreads further, or is not separable, one after another.
template <int R>
HWY_NOINLINE void count_spread(PairWork& w, std::size_t r, const Batch<R>& batch, std::int64_t bin) {
  constexpr int kMostBins = 4;
  const std::int64_t first = w.tally.first_bin[r];
  const std::int64_t last = first + static_cast<std::int64_t>(Summary::kBins) - 1;
  std::uint64_t* const bins = w.tally.histogram + r * Summary::kBins;
  const auto each = [&](const auto& body) {
    for (std::size_t row = 0; row < batch.n_rows; ++row)
      for (std::size_t b = 0; b < batch.n_blocks; ++b)
        body(load(batch.cv[r] + row * batch.row_stride + b * batch.block_stride));
  };
  std::uint64_t counted = 0;
  for (int i = 0; i < kMostBins && bin < last; ++i, ++bin) {
    const Vector edge = all(std::bit_cast<double>((bin + 1) << kLowBits));
    std::uint64_t below = 0;
    each([&](Vector cv) { below += hn::CountTrue(kTag, hn::Lt(cv, edge)); });
    bins[bin - first] += below - counted;
    counted = below;
    if (counted == batch.n_candidates) return;
  }
  const Vector edge = all(std::bit_cast<double>(bin << kLowBits));
  each([&](Vector cv) { count_one_by_one(w, r, cv, edge); });
}

template <int R>
HWY_INLINE void count_in_histogram(PairWork& w, std::size_t r, const Batch<R>& batch) {
  const std::int64_t first = w.tally.first_bin[r];
  const double least = hn::GetLane(hn::MinOfLanes(kTag, batch.least_cv[r]));
  const std::int64_t bin = std::max(std::bit_cast<std::int64_t>(least) >> kLowBits, first);
  const Vector edge = all(std::bit_cast<double>((bin + 1) << kLowBits));
  if (HWY_LIKELY(bin - first < static_cast<std::int64_t>(Summary::kBins) - 1 &&
                 hn::AllTrue(kTag, hn::Lt(batch.greatest_cv[r], edge))))
    w.tally.histogram[r * Summary::kBins + static_cast<std::size_t>(bin - first)] += batch.n_candidates;
  else
    count_spread<R>(w, r, batch, bin);
}

/// Shows the lists what they may want, counts, and adds the weights that matter; true when there were some.
template <int R, bool kTally>
HWY_INLINE bool take(PairWork& w, const Batch<R>& batch) {
  bool weighed = false;
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
      count_in_histogram<R>(w, r, batch);
      const Vector best = hn::Mul(batch.least_rss[r], all(batch.factor));
      if (HWY_UNLIKELY(!hn::AllFalse(kTag, hn::Le(best, all(w.weight_limit[r]))))) {
        add_weights<R>(w, r, batch);
        weighed = true;
      }
    }
  }
  return weighed;
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

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

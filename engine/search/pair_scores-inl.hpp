// What becomes of scores: they are shown to the lists, weighed and counted.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_SCORES_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_SCORES_HPP
#undef FORMSIEVE_PAIR_SCORES_HPP
#else
#define FORMSIEVE_PAIR_SCORES_HPP
#endif

#include "hwy/contrib/math/math-inl.h"
#include "search/pair_vectors-inl.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

/// A weight above e^this makes the sums forget what is too small to matter and start from a new unit.
constexpr double kLargestLogWeight = 500.0;
/// A mean squared residual below this share of the response's variance is rounding: weights treat it as this much.
constexpr double kExactFit = 1e-28;
/// What weighs e^this or less weighs nothing.
constexpr double kSmallestLogWeight = -700.0;

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

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

#include "search/pair_kernel.hpp"

#include "base/simd_targets.hpp"

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "search/pair_kernel.cpp"
#include "hwy/foreach_target.h"
#include "hwy/highway.h"

#include "search/pair_last-inl.hpp"
#include "search/pair_nodes-inl.hpp"

#include <algorithm>
#include <type_traits>

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

/// Candidates between two calls of PairSink::tick.
constexpr std::uint64_t kTickCandidates = 500'000;

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

  /// The pairs of a child and nothing below it, by the same arithmetic as in child().
  void pairs_of_child(std::size_t level, std::size_t lane) {
    const std::size_t p = shape.predictor_of_lane[lane];
    const std::size_t picks_left = shape.most_picks - level;
    if (!(w.levels[level].smallest[lane] > w.smallest_pivot)) return;
    if (p == 2 && score_last != nullptr) {
      child(level, lane, p, false, picks_left);
    } else if (p > 2 && picks_left > 3) {
      make_child<R, true, true, kTally>(w, level, lane);
    } else {
      make_child<R, false, true, kTally>(w, level, lane);
    }
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
                     static_cast<std::size_t>(__builtin_popcount(inside)),
                     1,
                     1,
                     {},
                     {},
                     0,
                     0,
                     {},
                     {},
                     {}};
      for (std::size_t r = 0; r < R; ++r) {
        store(cv[r], cv_scores[r]);
        store(rss[r], rss_scores[r]);
        batch.cv[r] = cv_scores[r];
        batch.rss[r] = rss_scores[r];
        batch.greatest_cv[r] = all(kInfinity);
        batch.least_cv[r] = cv[r];
        batch.least_rss[r] = rss[r];
      }
      take<R, kTally>(w, batch);
      if constexpr (kTally) {
        for (std::size_t r = 0; r < R; ++r) {
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
void open_node_here(PairWork& w, std::size_t level, std::size_t open) {
  with_responses(w.n_responses, [&](auto r) { clear_node<decltype(r)::value>(w, level, open); });
}
void walk_children_here(PairWork& w, std::size_t level, std::size_t open, std::uint64_t largest) {
  with_options(w, [&](auto r, auto tally) {
    Walk<decltype(r)::value, decltype(tally)::value>(w).children(level, open, largest);
  });
}
void score_pairs_of_child_here(PairWork& w, std::size_t level, std::size_t lane) {
  with_responses(w.n_responses, [&](auto r) { Walk<decltype(r)::value, false>(w).pairs_of_child(level, lane); });
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
HWY_EXPORT(score_pairs_of_child_here);

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
void score_pairs_of_child(PairWork& work, std::size_t level, std::size_t lane) {
  HWY_DYNAMIC_DISPATCH(score_pairs_of_child_here)(work, level, lane);
}

}  // namespace formsieve::search

#endif

// The arithmetic of the walk over predictors whose forms are single columns, in SIMD.
//
// A node is a set of forms already brought in. With A, V the training and validation matrices of one fold at that node
// (head of walk.hpp), m = A_c· / A_cc and U = 2V, bringing in column c gives
//     A_jj −= m_j A_cj            V_jj += m_j (m_j V_cc − U_cj)
//     A_ij −= m_i A_cj            U_ij −= m_i U_cj + m_j (U_ci − 2 m_i V_cc)
// and for response y, whose row is A_y·, U_y·, the same with m_y = A_yc / A_cc. The held-out sum of squared errors
// changes by m_y (m_y V_cc − U_yc), the residual sum of squares by −m_y A_yc.
//
// Every node scores the pairs (a, b) of its open predictors in closed form: with r = A_ab, u = U_ab, m = r / A_aa,
//     D = A_bb − m r,   V' = V_bb + m (m V_aa − u),   β = (A_yb − m_y r) / D
//     held out: base_a + Σ_folds β (β V' − (U_yb − m_y u − m (U_ya − 2 m_y V_aa)))
//     RSS:      base_a − β (A_yb − m_y r)
// so that the last two predictors of a candidate never become nodes. Columns stand in the lanes, folds in the outer
// loop. All that the loops need is laid out beforehand; nothing here allocates.
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::search {

/// Lanes are padded to this many, the widest vector's.
inline constexpr std::size_t kLanes = 8;
/// Response forms that one kernel takes at a time; more are walked in several passes.
inline constexpr std::size_t kMostResponses = 4;

inline constexpr std::size_t padded(std::size_t n) { return (n + kLanes - 1) / kLanes * kLanes; }

/// How the columns of the predictors stand in lanes. The first predictor is padded to whole vectors unless the second
/// has room in the same one; the others follow without gaps. Predictors are picked in descending order, so that what is
/// open at a node is a prefix of the lanes.
struct PairShape {
  /// `n_forms` by predictor, each at least 1; at most `most_picks` of them in a candidate.
  PairShape(const std::vector<std::size_t>& n_forms, std::size_t most_picks);

  std::size_t n_predictors() const { return first_lane.size() - 1; }
  std::size_t n_lanes() const { return first_lane.back(); }
  /// Candidates that pick from the first `open` predictors at most `picks`, none among them; saturating.
  std::uint64_t size(std::size_t picks, std::size_t open) const { return sizes[picks][open]; }
  /// Columns of the first `open` predictors.
  std::size_t columns(std::size_t open) const { return n_columns[open]; }

  std::size_t most_picks;
  std::vector<std::size_t> first_lane;            ///< [n_predictors + 1]
  std::vector<std::size_t> n_columns;             ///< [n_predictors + 1] columns of the first so many predictors
  std::vector<std::size_t> predictor_of_lane;     ///< [n_lanes]; padding lanes belong to predictor 0
  std::vector<std::size_t> row_offset;            ///< [n_lanes + 1] of a lane's row: by kLanes lanes A, then U
  std::vector<std::size_t> row_length;            ///< [n_lanes] lanes of lower predictors, padded
  std::vector<std::vector<std::uint64_t>> sizes;  ///< [most_picks + 1][n_predictors + 1]
};

/// Where the numbers of one node stand. All strides in doubles, lanes padded.
struct PairLevel {
  std::size_t stride = 0;     ///< lanes
  std::size_t fold_size = 0;  ///< numbers of a fold
  double* folds = nullptr;    ///< [n_folds × fold_size]
  double* all_rows = nullptr;
  double* base_cv = nullptr;   ///< [responses × stride] held-out SSE after one more column
  double* base_rss = nullptr;  ///< [responses × stride]
  double* smallest = nullptr;  ///< [stride] smallest A_jj over the folds and all rows
};

/// Best scores and summed weights by what a candidate contains. Every cell is a vector of kLanes; only the sum or the
/// minimum over it means something. Index [0] of `best` is the held-out SSE, [1] the penalised RSS.
struct PairTally {
  bool wanted = false;
  double* best_column[2] = {};  ///< [responses × n_lanes × kLanes] candidates that contain the column …
  double* best_lane[2] = {};    ///< [responses × padded lanes] … as the last pick: one number a lane
  double* best_absent[2] = {};  ///< [responses × n_predictors × kLanes] candidates without the predictor
  double* best_picks[2] = {};   ///< [responses × (most_picks + 1) × kLanes] by number of picks
  double* best_node[2] = {};    ///< [levels × responses × kLanes] everything at and below the node
  double* best_group[2] = {};   ///< [levels × n_predictors × responses × kLanes] by its highest further predictor
  double* row_best[2] = {};     ///< [responses × padded lanes] scratch: pairs of one predictor's rows by lane
  double* weight_column = nullptr;  ///< as best_column
  double* weight_lane = nullptr;
  double* weight_picks = nullptr;
  double* weight_node = nullptr;
  double* gate_last[2] = {};  ///< [responses] pairs of the last two predictors lower no cell from this score on …
  double* gate_rows[2] = {};  ///< [responses × n_predictors] … nor do pairs with a row of this predictor
  /// [responses × Summary::kBins] candidates by held-out SSE.
  std::uint64_t* histogram = nullptr;
  const std::int64_t* first_bin =
      nullptr;  ///< [responses] bits of the first bin's lower edge, as far as bins need them
};

/// Receives the lanes of a vector of scores that a list may want. `mask` has a bit for each.
class PairSink {
 public:
  virtual ~PairSink() = default;
  /// The candidate is path[0 … n_path), `row` and `first_lane` + i; `row` is kNone for a candidate of one pick fewer.
  virtual void offer(std::size_t response, std::size_t n_path, std::size_t row, std::size_t first_lane, unsigned mask,
                     const double* cv_sse, const double* rss) = 0;
  /// Some milliseconds of work were done; true to stop.
  virtual bool tick(std::uint64_t scored) = 0;
  static constexpr std::size_t kNone = ~std::size_t{0};
};

/// What the loops work on. A view; the owner is PairWalker.
struct PairWork {
  const PairShape* shape = nullptr;
  std::size_t n_folds = 0;
  std::size_t n_responses = 0;
  std::size_t outer_columns = 0;  ///< design columns of the candidate outside the kernel
  double smallest_pivot = 0.0;    ///< relative to a column's diagonal before any elimination, which is 1 here
  PairLevel* levels = nullptr;    ///< [most levels]
  std::size_t* path = nullptr;    ///< [most_picks] lanes picked
  double* pair_scores =
      nullptr;  ///< scratch: [2 responses + 1][half of all rows' length]: sums over folds, smallest pivots, RSS
  const double* padding = nullptr;    ///< [padded lanes] 0, or +∞ in padding lanes of predictor 0
  double* multipliers = nullptr;      ///< scratch: [2 × padded lanes]
  const double* limit_cv = nullptr;   ///< [responses] a list may want scores up to here
  const double* limit_rss = nullptr;  ///< [(most columns + 1) × responses]
  PairSink* sink = nullptr;

  PairTally tally;
  const double* summary_factor = nullptr;  ///< [most columns + 1] exp(penalty / n)
  std::size_t n_rows = 0;
  double* weight_unit =
      nullptr;  ///< [responses] the penalised RSS whose weight is 1; lowered when weights grow too large
  double* weight_limit = nullptr;  ///< [responses] weights beyond this penalised RSS are left out
  double weight_range = 0.0;       ///< weight_limit / weight_unit
  double weight_overflow = 0.0;    ///< a penalised RSS below this share of the unit needs a new unit

  std::uint64_t n_scored = 0;       ///< all responses
  std::uint64_t n_inseparable = 0;  ///< all responses
  std::uint64_t n_reported = 0;
  bool stopped = false;
};

/// Offsets within a fold's numbers: for each kLanes lanes one vector of every field, so that they stand at fixed
/// distances from each other; then the rows. `R`: responses.
template <std::size_t R>
struct FoldFields {
  static constexpr std::size_t kFields = 3 + 4 * R;
  static constexpr std::size_t at(std::size_t field, std::size_t lane) {
    return lane / kLanes * (kFields * kLanes) + field * kLanes + lane % kLanes;
  }
  static constexpr std::size_t a(std::size_t lane) { return at(0, lane); }
  static constexpr std::size_t inverse(std::size_t lane) { return at(1, lane); }
  static constexpr std::size_t v(std::size_t lane) { return at(2, lane); }
  static constexpr std::size_t ya(std::size_t r, std::size_t lane) { return at(3 + r, lane); }
  static constexpr std::size_t my(std::size_t r, std::size_t lane) { return at(3 + R + r, lane); }
  static constexpr std::size_t yu(std::size_t r, std::size_t lane) { return at(3 + 2 * R + r, lane); }
  static constexpr std::size_t hy(std::size_t r, std::size_t lane) { return at(3 + 3 * R + r, lane); }
  /// `stride`: lanes of the level, padded.
  static constexpr std::size_t rows(std::size_t stride) { return stride * kFields; }
};
/// The same where the number of responses is known at run time only.
struct FoldOffsets {
  std::size_t n_responses;
  std::size_t n_fields() const { return 3 + 4 * n_responses; }
  std::size_t at(std::size_t field, std::size_t lane) const {
    return lane / kLanes * (n_fields() * kLanes) + field * kLanes + lane % kLanes;
  }
  std::size_t ya(std::size_t r, std::size_t lane) const { return at(3 + r, lane); }
  std::size_t yu(std::size_t r, std::size_t lane) const { return at(3 + 2 * n_responses + r, lane); }
  std::size_t rows(std::size_t stride) const { return stride * n_fields(); }
};

/// Completes level 0 from its A, V, A_y, U_y, rows and the response's own entries (already in base_cv, base_rss as what
/// a candidate has without any column of the kernel): inverses, multipliers, bases, smallest pivots.
void complete_root(PairWork& work);
/// Makes level + 1 from level by bringing in a lane; nothing is scored. The lane must be separable.
void descend(PairWork& work, std::size_t level, std::size_t lane);
/// Starts the tally of the level at which a run starts.
void open_node(PairWork& work, std::size_t level, std::size_t open);
/// Scores the single columns open at level 0.
void score_singles(PairWork& work);
/// Scores the pairs of level, whose first `open` predictors are open.
void score_pairs(PairWork& work, std::size_t level, std::size_t open);
/// Scores everything below the children of a level whose subtree has at most `largest` candidates, and closes the
/// level's tally: best_node and weight_node of the level are complete afterwards.
void walk_children(PairWork& work, std::size_t level, std::size_t open, std::uint64_t largest);
/// Scores the pairs of the child of a level that brings in a lane, as walk_children does it; no tally.
void score_pairs_of_child(PairWork& work, std::size_t level, std::size_t lane);

}  // namespace formsieve::search

#include "search/pair_walker.hpp"

#include "search/walk.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <memory>

namespace formsieve::search {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
/// A weight above e^this makes the sums start from a new unit, before they overflow.
constexpr double kLargestLogWeight = 500.0;
/// A padding lane has no column.
constexpr std::size_t kNoColumn = ~std::size_t{0};
/// Vectors are read from any lane on, hence up to this much beyond the last number of a row.
constexpr std::size_t kSlack = kLanes;

std::size_t n_levels(const PairShape& shape) { return std::max<std::size_t>(shape.most_picks, 2) - 1; }

/// Numbers of one fold at a level: see FoldOffsets.
std::size_t fold_size(const PairShape& shape, std::size_t level, std::size_t n_responses) {
  const std::size_t open = shape.n_predictors() - level;
  const std::size_t rows = shape.row_offset[shape.first_lane[open]];
  return FoldOffsets{n_responses}.rows(padded(shape.first_lane[open]) + kSlack) + rows + kSlack;
}

/// The first number of a vector that stands at the start of a cache line, where a load of kLanes numbers touches one
/// line.
double* aligned(std::vector<double>& memory) {
  void* start = memory.data();
  std::size_t space = memory.size() * sizeof(double);
  return static_cast<double*>(std::align(kLanes * sizeof(double), sizeof(double), start, space));
}

/// Gives out consecutive pieces of one allocation.
class Pieces {
 public:
  explicit Pieces(double* start) : next_(start) {}
  double* take(std::size_t n) {
    double* const piece = next_;
    next_ += padded(n);
    return piece;
  }
  double* next() const { return next_; }

 private:
  double* next_;
};

std::size_t level_size(const PairShape& shape, std::size_t level, std::size_t n_folds, std::size_t n_responses) {
  const std::size_t stride = padded(shape.first_lane[shape.n_predictors() - level]) + kSlack;
  return (n_folds + 1) * padded(fold_size(shape, level, n_responses)) + (2 * n_responses + 1) * padded(stride);
}

double sum_of(const double* cell) {
  double sum = 0.0;
  for (std::size_t i = 0; i < kLanes; ++i) sum += cell[i];
  return sum;
}

double least_of(const double* cell) { return *std::min_element(cell, cell + kLanes); }

}  // namespace

PairWalker::PairWalker(const PairShape& largest, std::size_t n_folds, std::size_t n_responses, std::size_t n_rows,
                       double smallest_pivot_rel, const Summary& summary, PairSink& sink)
    : shape_(&largest),
      n_responses_(n_responses),
      levels_(n_levels(largest)),
      path_(largest.most_picks + 1),
      limit_cv_(n_responses, kInfinity),
      factor_(summary.factor),
      unit_(summary.unit),
      start_unit_(summary.unit),
      weight_limit_(n_responses),
      column_of_lane_(padded(largest.n_lanes())),
      scale_(padded(largest.n_lanes())),
      first_bin_(summary.first_bin),
      padding_(padded(largest.n_lanes())) {
  work_.n_folds = n_folds;
  work_.n_responses = n_responses;
  work_.smallest_pivot = smallest_pivot_rel;
  work_.sink = &sink;
  work_.n_rows = n_rows;
  work_.weight_overflow = std::exp(-2.0 * kLargestLogWeight / static_cast<double>(n_rows));
  work_.tally.wanted = summary.wanted;
  work_.weight_range = summary.range;
  std::size_t size =
      2 * padded(largest.n_lanes()) + 2 * kSlack + (2 * n_responses + 1) * (largest.row_offset.back() / 2) + kSlack;
  for (std::size_t level = 0; level < levels_.size(); ++level)
    if (level <= largest.n_predictors()) size += level_size(largest, level, n_folds, n_responses);
  memory_.assign(size + 9 * kLanes, 0.0);
  if (summary.wanted) {
    const std::size_t cells =
        n_responses * kLanes *
        (3 * (largest.n_lanes() + kSlack) + 3 * (largest.n_lanes() + kSlack) + 4 * largest.n_predictors() +
         3 * (largest.most_picks + 1) + 3 * (largest.most_picks + 1) +
         2 * (largest.most_picks + 1) * largest.n_predictors() + 24);
    tally_memory_.assign(cells, 0.0);
    histogram_.assign(n_responses * search::Summary::kBins, 0);
  }
}

void PairWalker::lay_out_levels() {
  Pieces pieces(aligned(memory_));
  work_.multipliers = pieces.take(2 * padded(shape_->n_lanes()) + 2 * kSlack);
  work_.pair_scores = pieces.take((2 * n_responses_ + 1) * (shape_->row_offset.back() / 2) + kSlack);
  for (std::size_t level = 0; level < n_levels(*shape_) && level <= shape_->n_predictors(); ++level) {
    PairLevel& at = levels_[level];
    at.stride = padded(shape_->first_lane[shape_->n_predictors() - level]) + kSlack;
    at.fold_size = padded(fold_size(*shape_, level, n_responses_));
    at.folds = pieces.take(work_.n_folds * at.fold_size);
    at.all_rows = pieces.take(at.fold_size);
    at.base_cv = pieces.take(n_responses_ * at.stride);
    at.base_rss = pieces.take(n_responses_ * at.stride);
    at.smallest = pieces.take(at.stride);
  }
  assert(pieces.next() <= memory_.data() + memory_.size());
}

void PairWalker::lay_out_tally() {
  PairTally& tally = work_.tally;
  const std::size_t columns = n_responses_ * shape_->n_lanes() * kLanes;
  const std::size_t lanes = n_responses_ * padded(shape_->n_lanes()) + kSlack;
  const std::size_t predictors = shape_->n_predictors() * n_responses_ * kLanes;
  const std::size_t levels = (shape_->most_picks + 1) * n_responses_ * kLanes;
  Pieces pieces(aligned(tally_memory_));
  for (int x = 0; x < 2; ++x) {
    tally.best_column[x] = pieces.take(columns);
    tally.best_lane[x] = pieces.take(lanes);
    tally.best_absent[x] = pieces.take(predictors);
    tally.gate_last[x] = pieces.take(n_responses_);
    tally.gate_rows[x] = pieces.take(n_responses_ * shape_->n_predictors());
  }
  run_cells_ = pieces.next();
  for (int x = 0; x < 2; ++x) {
    tally.best_picks[x] = pieces.take(levels);
    tally.best_node[x] = pieces.take(levels);
    tally.best_group[x] = pieces.take((shape_->most_picks + 1) * predictors);
    tally.row_best[x] = pieces.take(lanes);
  }
  weight_cells_ = pieces.next();
  tally.weight_column = pieces.take(columns);
  tally.weight_lane = pieces.take(lanes);
  tally.weight_picks = pieces.take(levels);
  tally.weight_node = pieces.take(levels);
  tally.first_bin = first_bin_.data();
  tally.histogram = histogram_.data();
  assert(pieces.next() <= tally_memory_.data() + tally_memory_.size());
}

/// The minima by column and by absence hold for all runs with the same predictors.
void PairWalker::forget_cells() { std::fill(tally_memory_.data(), run_cells_, kInfinity); }

void PairWalker::clear_run() {
  std::fill(run_cells_, weight_cells_, kInfinity);
  std::fill(weight_cells_, tally_memory_.data() + tally_memory_.size(), 0.0);
  unit_ = start_unit_;
  for (std::size_t r = 0; r < n_responses_; ++r) weight_limit_[r] = unit_[r] * work_.weight_range;
}

/// One fold's A, V, A_y, U_y and rows at level 0, columns scaled to a unit diagonal before any elimination.
void PairWalker::fill(const double* a, const double* v, std::size_t order, std::span<const std::size_t> column,
                      std::span<const double> scale, double* out) const {
  const FoldOffsets at{n_responses_};
  const auto entry = [&](const double* matrix, std::size_t i, std::size_t j) {
    return column[i] == kNoColumn || column[j] == kNoColumn
               ? 0.0
               : matrix[column[i] * order + column[j]] * scale[i] * scale[j];
  };
  for (std::size_t i = 0; i < shape_->n_lanes(); ++i) {
    out[at.at(0, i)] = column[i] == kNoColumn ? 1.0 : entry(a, i, i);
    out[at.at(2, i)] = v == nullptr ? 0.0 : entry(v, i, i);
    for (std::size_t r = 0; r < n_responses_; ++r) {
      const std::size_t y = (order - n_responses_ + r) * order;
      out[at.ya(r, i)] = column[i] == kNoColumn ? 0.0 : a[y + column[i]] * scale[i];
      out[at.yu(r, i)] = column[i] == kNoColumn || v == nullptr ? 0.0 : 2.0 * v[y + column[i]] * scale[i];
    }
    double* const row = out + at.rows(levels_[0].stride) + shape_->row_offset[i];
    const std::size_t n_below = shape_->first_lane[shape_->predictor_of_lane[i]];
    for (std::size_t j = 0; j < n_below; ++j) {
      const std::size_t at_j = j / kLanes * (2 * kLanes) + j % kLanes;
      row[at_j] = entry(a, i, j);
      row[at_j + kLanes] = v == nullptr ? 0.0 : 2.0 * entry(v, i, j);
    }
  }
}

void PairWalker::load(const PairShape& shape, std::span<const std::size_t> first_column, const OuterGrams& node,
                      const std::vector<std::vector<double>>& root_diagonal, std::size_t outer_columns) {
  const bool same_shape = work_.shape == &shape;
  shape_ = &shape;
  work_.shape = shape_;
  work_.outer_columns = outer_columns;
  lay_out_levels();
  if (work_.tally.wanted && !same_shape) {
    lay_out_tally();
    forget_cells();
  }
  work_.levels = levels_.data();
  work_.path = path_.data();
  work_.padding = padding_.data();
  work_.limit_cv = limit_cv_.data();
  work_.limit_rss = limit_rss_.data();
  work_.summary_factor = factor_.data();
  work_.weight_unit = unit_.data();
  work_.weight_limit = weight_limit_.data();
  entered_ = 0;

  for (std::size_t lane = 0; lane < shape.n_lanes(); ++lane) {
    const std::size_t p = shape.predictor_of_lane[lane];
    const std::size_t form = lane - shape.first_lane[p];
    padding_[lane] = form < shape.columns(p + 1) - shape.columns(p) ? 0.0 : kInfinity;
    column_of_lane_[lane] = form < shape.columns(p + 1) - shape.columns(p) ? first_column[p] + form : kNoColumn;
  }
  PairLevel& root = levels_[0];
  for (std::size_t f = 0; f <= node.n_folds(); ++f) {
    const bool is_fold = f < node.n_folds();
    for (std::size_t lane = 0; lane < shape.n_lanes(); ++lane) {
      const double diagonal = column_of_lane_[lane] == kNoColumn ? 1.0 : root_diagonal[f][column_of_lane_[lane]];
      scale_[lane] = diagonal > 0.0 ? 1.0 / std::sqrt(diagonal) : 0.0;
    }
    fill(node.training(f), is_fold ? node.validation(f) : nullptr, node.order(), column_of_lane_, scale_,
         is_fold ? root.folds + f * root.fold_size : root.all_rows);
  }
  for (std::size_t r = 0; r < n_responses_; ++r) {
    std::fill_n(root.base_cv + r * root.stride, root.stride, node.cv_sse(r));
    std::fill_n(root.base_rss + r * root.stride, root.stride, node.rss(r));
  }
  complete_root(work_);
}

std::size_t PairWalker::enter(std::span<const std::size_t> lanes) {
  std::size_t level = 0;
  while (level < lanes.size() && level < entered_ && path_[level] == lanes[level]) ++level;
  for (; level < lanes.size(); ++level) {
    if (!(levels_[level].smallest[lanes[level]] > work_.smallest_pivot)) break;
    descend(work_, level, lanes[level]);
  }
  entered_ = level;
  return level;
}

void PairWalker::run(std::uint64_t largest) {
  const std::size_t open = entered_ == 0 ? shape_->n_predictors() : shape_->predictor_of_lane[path_[entered_ - 1]];
  if (work_.tally.wanted) {
    clear_run();
    open_node(work_, entered_, open);
  }
  if (entered_ == 0 && shape_->most_picks > 0) score_singles(work_);
  if (entered_ + 2 <= shape_->most_picks) score_pairs(work_, entered_, open);
  walk_children(work_, entered_, open, largest);
}

void PairWalker::run_child(std::size_t lane) { score_pairs_of_child(work_, entered_, lane); }

void PairWalker::harvest(PairHarvest& harvest) const {
  const PairTally& tally = work_.tally;
  const std::size_t n_lanes = shape_->n_lanes();
  const auto log_weight = [&](std::size_t r, double sum) {
    return std::log(sum) - 0.5 * static_cast<double>(work_.n_rows) * std::log(unit_[r]);
  };
  const auto figures = [&](std::size_t r, double* const(&best)[2], const double* weight, std::size_t cell) {
    const double own = weight == nullptr ? 0.0 : sum_of(weight + cell);
    return PairHarvest::Figures{{least_of(best[0] + cell), least_of(best[1] + cell)}, log_weight(r, own)};
  };
  harvest.column.resize(n_responses_);
  harvest.absent.resize(n_responses_);
  harvest.picks.resize(n_responses_);
  harvest.all.resize(n_responses_);
  for (std::size_t r = 0; r < n_responses_; ++r) {
    harvest.column[r].resize(n_lanes);
    for (std::size_t lane = 0; lane < n_lanes; ++lane) {
      const std::size_t cell = (r * n_lanes + lane) * kLanes;
      const std::size_t last = r * padded(n_lanes) + lane;
      auto& column = harvest.column[r][lane];
      for (int x = 0; x < 2; ++x)
        column.best[x] = std::min(least_of(tally.best_column[x] + cell), tally.best_lane[x][last]);
      column.log_weight = log_weight(r, sum_of(tally.weight_column + cell) + tally.weight_lane[last]);
    }
    harvest.absent[r].resize(shape_->n_predictors());
    for (std::size_t p = 0; p < shape_->n_predictors(); ++p)
      harvest.absent[r][p] = figures(r, tally.best_absent, nullptr, (r * shape_->n_predictors() + p) * kLanes);
    harvest.picks[r].resize(shape_->most_picks + 1);
    for (std::size_t k = 0; k <= shape_->most_picks; ++k)
      harvest.picks[r][k] =
          figures(r, tally.best_picks, tally.weight_picks, (r * (shape_->most_picks + 1) + k) * kLanes);
    harvest.all[r] = figures(r, tally.best_node, tally.weight_node, (entered_ * n_responses_ + r) * kLanes);
  }
}

}  // namespace formsieve::search

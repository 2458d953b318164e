// Memory and bookkeeping around the pair kernel: one worker's.
#pragma once

#include "search/outer_grams.hpp"
#include "search/pair_kernel.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::search {

/// What one run of the kernel found, by what candidates contain. Minima over nothing are infinite. [response] first.
struct PairHarvest {
  struct Figures {
    double best[2];     ///< held-out SSE; penalised RSS
    double log_weight;  ///< ln Σ penalised_rss^(−n/2)
  };
  std::vector<std::vector<Figures>> column;  ///< [response][lane] candidates with the column, picked in the run
  std::vector<std::vector<Figures>> absent;  ///< [response][predictor] without the predictor; no weights
  std::vector<std::vector<Figures>> picks;   ///< [response][number of picks]
  std::vector<Figures> all;                  ///< [response]
};

/// Runs the kernel below outer nodes. All memory is taken on construction, for the largest shape.
class PairWalker {
 public:
  struct Summary {
    bool wanted = false;
    std::vector<double> factor;           ///< [most columns + 1] exp(penalty / n)
    std::vector<double> unit;             ///< [responses] the penalised RSS whose weight is 1 at first
    double range = 0.0;                   ///< weights beyond range × unit are left out
    std::vector<std::int64_t> first_bin;  ///< [responses] see search::first_bin
  };

  /// `largest` has every simple predictor and as many picks as any run.
  PairWalker(const PairShape& largest, std::size_t n_folds, std::size_t n_responses, std::size_t n_rows,
             double smallest_pivot_rel, const Summary& summary, PairSink& sink);

  /// Reads the kernel's root from an outer node. `first_column[p]`: of each predictor of the shape in the node;
  /// `root_diagonal[fold][column]`: before any elimination. The shape must outlive the runs.
  void load(const PairShape& shape, std::span<const std::size_t> first_column, const OuterGrams& node,
            const std::vector<std::vector<double>>& root_diagonal, std::size_t outer_columns);
  /// Goes to the node that picks these lanes; levels shared with the node before are kept. Returns how many of them are
  /// in: fewer than all when one is inseparable.
  std::size_t enter(std::span<const std::size_t> lanes);
  /// Scores what lies below the entered node in the kernel, children with at most `largest` candidates included, single
  /// columns when it is the root.
  void run(std::uint64_t largest);
  /// Scores the pairs of the entered node's child that brings in this lane, by the same arithmetic as a run from the
  /// entered node, and nothing below it. Without a tally.
  void run_child(std::size_t lane);

  std::uint64_t n_scored() const { return work_.n_scored; }
  std::uint64_t n_inseparable() const { return work_.n_inseparable; }
  bool stopped() const { return work_.stopped; }
  /// [response × Summary::kBins] candidates of all runs.
  const std::vector<std::uint64_t>& histogram() const { return histogram_; }
  const PairShape& shape() const { return *shape_; }
  /// Lanes picked on the way to the node whose candidates are being offered.
  const std::vector<std::size_t>& path() const { return path_; }
  /// Makes `harvest` of the last run.
  void harvest(PairHarvest& harvest) const;
  /// The vectors of limits that the kernel reads: [responses], [(most columns + 1) × responses].
  std::vector<double>& limit_cv() { return limit_cv_; }
  std::vector<double>& limit_rss() { return limit_rss_; }

 private:
  void lay_out_levels();
  void lay_out_tally();
  void forget_cells();
  void clear_run();
  void fill(const double* a, const double* v, std::size_t order, std::span<const std::size_t> column,
            std::span<const double> scale, double* out) const;

  const PairShape* shape_;
  std::size_t n_responses_;
  PairWork work_;
  std::vector<double> memory_, tally_memory_;
  std::vector<PairLevel> levels_;
  std::vector<std::size_t> path_;
  std::size_t entered_ = 0, valid_levels_ = 0;
  std::vector<double> limit_cv_, limit_rss_, factor_, unit_, start_unit_, weight_limit_;
  std::vector<std::uint64_t> histogram_;
  std::vector<std::size_t> column_of_lane_;
  std::vector<double> scale_;
  std::vector<std::int64_t> first_bin_;
  std::vector<double> padding_;
  double* run_cells_ = nullptr;     ///< in tally_memory_: from here on of one run only …
  double* weight_cells_ = nullptr;  ///< … and from here on sums
};

}  // namespace formsieve::search

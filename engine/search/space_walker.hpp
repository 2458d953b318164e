// One worker of the walk: outer nodes, the pair kernel below them, the lists and the summary.
#pragma once

#include "search/best_list.hpp"
#include "search/outer_grams.hpp"
#include "search/outer_tree.hpp"
#include "search/pair_walker.hpp"
#include "search/parts.hpp"
#include "search/standings.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <map>
#include <memory>
#include <span>
#include <vector>

namespace formsieve::search {

/// What all workers of one walk share: at most kMostResponses of the space's responses.
struct WalkSetup {
  WalkSetup(const Space& space, const base::GramSet& grams, const WalkOptions& options, std::size_t first_response,
            std::size_t n_responses);
  /// The same with the order of the predictors given (OuterTree).
  WalkSetup(const Space& space, const base::GramSet& grams, const WalkOptions& options, std::size_t first_response,
            std::size_t n_responses, const std::vector<std::size_t>& strong);

  /// The limit of a rule's list for a response of this setup.
  double limit(const PoolRule& rule, std::size_t response) const;

  const Space& space;
  const WalkOptions& options;
  std::size_t first_response;
  OuterTree tree;
  OuterGrams root;
  std::vector<std::vector<double>> smallest;       ///< [fold][column] pivots must be larger
  std::vector<std::vector<double>> root_diagonal;  ///< [fold][column]
  std::size_t n_rows;
  StandingCells cells;
  PairWalker::Summary summary;
  std::vector<int> unit_exponent;  ///< [responses] of Summary::unit_sse, where a summary is wanted
};

/// Walks parts one after another. What it has found after a set of parts does not depend on their order.
class SpaceWalker final : private PairSink {
 public:
  explicit SpaceWalker(const WalkSetup& setup);

  /// Walks a part. Returns its sums of weights where a summary is wanted.
  WeightLogs walk(const Part& part, std::uint64_t largest);
  /// Scores the candidates of one node with the bits that they get in a walk of split(tree, largest): those that add at
  /// most two simple forms to it. Without a summary.
  void walk_node(const OuterPath& outer, std::span<const std::size_t> lanes, std::uint64_t largest);

  std::uint64_t n_scored() const { return n_outer_scored_ + pairs_.n_scored(); }
  std::uint64_t n_inseparable() const { return n_outer_inseparable_ + pairs_.n_inseparable(); }
  /// True when anything was left undone because a stop was requested.
  bool stopped() const { return stopped_; }
  const BestList& list(std::size_t rule, std::size_t response) const {
    return lists_[rule * setup_.root.n_responses() + response];
  }
  /// Minima and histogram so far.
  BestStandings standings() const;

 private:
  struct Criterion {
    Score score;
    std::vector<double> factor;  ///< [most columns + 1] exp(penalty / n)
  };
  /// The simple predictors open at an outer node, and their shape.
  struct Kernel {
    std::vector<std::size_t> simple;
    std::vector<std::size_t> first_column;
    PairShape shape;
  };

  bool enter(std::span<const std::size_t> path);
  const OuterGrams& node() const { return path_.empty() ? setup_.root : *levels_[path_.size() - 1]; }
  bool bring_in_form(std::size_t form);
  void visit_all();
  void score_own();
  void load_kernel();
  void run_kernel(std::span<const std::size_t> lanes, std::uint64_t largest);
  const Kernel& kernel();
  void add_own(const double* cv, const double* rss);
  void add_run(std::span<const std::size_t> lanes);
  void add(std::size_t response, std::size_t cell, const PairHarvest::Figures& figures);
  void add_everywhere(std::size_t response, const PairHarvest::Figures& figures, std::span<const std::size_t> lanes);

  void offer(std::size_t response, std::size_t n_path, std::size_t row, std::size_t first_lane, unsigned mask,
             const double* cv_sse, const double* rss) override;
  bool tick(std::uint64_t scored) override;
  void offer_one(std::size_t response, double cv_sse, double rss, std::size_t n_columns);
  void push_lane(std::size_t lane);
  void set_limits(std::size_t response);
  static double score_of(const Criterion& criterion, double cv_sse, double rss, std::size_t n_columns);

  const WalkSetup& setup_;
  std::vector<Criterion> criteria_;
  std::vector<BestList> lists_;  ///< [rule × response]
  PairShape largest_shape_;
  PairWalker pairs_;
  std::vector<std::unique_ptr<OuterGrams>> levels_;
  std::vector<double> scratch_;
  OuterPath path_, loaded_path_;
  bool loaded_ = false;
  std::size_t n_columns_ = 0;  ///< design columns of the outer node
  std::map<std::pair<std::vector<std::size_t>, std::size_t>, std::unique_ptr<Kernel>> kernels_;
  const Kernel* kernel_ = nullptr;
  std::vector<TermCode> terms_;

  BestStandings best_;
  std::vector<LogSum> weights_;
  PairHarvest harvest_;
  std::uint64_t n_outer_scored_ = 0, n_outer_inseparable_ = 0, n_reported_ = 0;
  bool stopped_ = false;
};

}  // namespace formsieve::search

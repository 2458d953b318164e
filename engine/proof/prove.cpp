#include "proof/prove.hpp"

#include "base/parallel.hpp"
#include "proof/certificate.hpp"
#include "proof/incumbents.hpp"
#include "proof/node_work.hpp"
#include "proof/open_nodes.hpp"
#include "proof/scope.hpp"
#include "proof/shortlist.hpp"
#include "proof/warm_start.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// Sweeps are given so many operations, and this many times [columns]³ for every response form: a root takes about as
/// many. Problems that they solve are solved before Newton's method would have got going (20 × 6, or 40 × 6 of 3,000
/// rows); in others little is lost.
constexpr std::size_t kMostColumns_sweeps = 300;  ///< with more a pass takes longer than a step of Newton's method
constexpr double kSweepsWork = 3e8;
constexpr double kSweepsWork_root = 60.0;

class Tree {
 public:
  Tree(const RootGram& root, const Restriction& restriction, const Limits& limits, const Effort& effort)
      : root_(root),
        scope_(scope_of(root, restriction)),
        limits_(limits),
        effort_(effort),
        list_(limits.keep, limits.within),
        incumbents_(root, scope_, list_, [this] { return expired(); }) {}

  Proof run(std::span<const search::Choice> hints) {
    begin();
    for (const search::Choice& hint : hints) incumbents_.improve(hint, false);
    if (effort_.incumbents) incumbents_.start();
    report();
    while (!open_.empty() && !expired() && nodes_ < limits_.nodes) {
      open_.cut_above(list_.threshold() + kTolerance);
      if (effort_.newton && !newton_ && work_ >= work_of_sweeps_) start_newton();
      work_on_batch();
      report();
    }
    open_.cut_above(list_.threshold() + kTolerance);
    return result();
  }

 private:
  bool expired() const { return limits_.stop.stop_requested() || (limits_.enough && limits_.enough()); }

  void begin() {
    if (limits_.certificate) *limits_.certificate = {};
    std::size_t n_columns = 0;
    for (const std::size_t response : scope_.responses) {
      roots_.push_back(root_node(scope_, response));
      if (limits_.start) roots_.back().inherited = limits_.start->roots.at(response);
      roots_.back().number = open_.push(roots_.back());
      if (limits_.certificate) limits_.certificate->roots.push_back(part_of(roots_.back()));
    }
    for (const search::PredictorChoices& predictor : root_.space().predictors)
      for (const search::FormBlock& form : predictor.forms) n_columns += form.n_columns;
    const auto order = static_cast<double>(n_columns);
    work_of_sweeps_ = effort_.sweeps_work * (kSweepsWork + kSweepsWork_root * order * order * order *
                                                               static_cast<double>(scope_.responses.size()));
    if (n_columns > kMostColumns_sweeps) work_of_sweeps_ = 0.0;
    open_.limit(effort_.most_open_bytes, root_.n_predictors(), n_columns);
  }

  /// The tree begins anew where it is still open, from the roots as sweeps have narrowed them: those that end in time
  /// are fast, but what is inherited from stalled ones is not worth going on from.
  void start_newton() {
    newton_ = true;
    std::vector<Node> roots;
    for (Node& root : roots_) {
      root.lower = std::max(root.lower, open_.lower(root.response));
      if (open_.has(root.response)) roots.push_back(root);
    }
    open_.clear();
    for (Node& root : roots) {
      const std::uint64_t old = root.number;
      root.number = open_.push(root);
      replace_children(old, root);
    }
  }

  /// In the certificate what was left of a root becomes its only child.
  void replace_children(std::uint64_t number, const Node& root) {
    if (!limits_.certificate) return;
    for (Certificate::Node& node : limits_.certificate->nodes) {
      if (node.part.number != number) continue;
      node.children = {part_of(root)};
      return;
    }
    for (Certificate::Part& part : limits_.certificate->roots)  // not worked on yet
      if (part.number == number) part.number = root.number;
  }

  Frozen freeze() const {
    Frozen frozen;
    frozen.root = &root_;
    frozen.scope = &scope_;
    frozen.effort = effort_;
    frozen.newton = newton_;
    frozen.record = limits_.certificate != nullptr;
    frozen.threshold = list_.threshold();
    if (const Listed* best = list_.best()) {
      frozen.best_score = best->score;
      frozen.best_columns = best->n_columns;
      frozen.best_choice = best->choice.choice;
    }
    frozen.expired = [this] { return expired(); };
    return frozen;
  }

  /// The threshold is that of the batch's beginning and results are taken in the batch's order: the tree is the same
  /// for any number of threads.
  void work_on_batch() {
    std::vector<Node> batch = open_.pop(effort_.batch);
    if (batch.empty()) return;
    const Frozen frozen = freeze();
    std::vector<NodeResult> results(batch.size());
    base::parallel_for(batch.size(), limits_.threads,
                       [&](std::size_t i) { results[i] = work_on(frozen, std::move(batch[i])); });
    for (NodeResult& result : results) take(result);
    nodes_ += results.size();
  }

  void take(NodeResult& result) {
    for (const Found& found : result.found) list_.offer(found.choice, found.score);
    if (effort_.incumbents)
      for (const search::Choice& rounded : result.rounded) incumbents_.improve(rounded, false);
    for (Node& child : result.children) {
      Certificate::Part part;
      if (result.record) part = part_of(child);
      part.number = open_.push(std::move(child));
      if (result.record) result.record->children.push_back(std::move(part));
    }
    if (result.record) limits_.certificate->nodes.push_back(std::move(*result.record));
    if (result.unfinished) open_.push(std::move(*result.unfinished));
    if (result.root)
      for (Node& root : roots_)
        if (root.response == result.root->response) root = std::move(*result.root);
    work_ += result.work;
  }

  void report() const {
    if (!limits_.progress) return;
    Progress progress;
    progress.nodes = nodes_;
    progress.open_nodes = open_.size();
    if (const Listed* best = list_.best()) progress.best_score = best->score;
    progress.lower_bound = std::min(list_.threshold(), open_.lower());
    limits_.progress(progress);
  }

  Proof result() const {
    Proof proof;
    proof.best = list_.entries();
    proof.proved = open_.empty();
    proof.full = list_.full();
    proof.nodes = nodes_;
    proof.lower_bound = std::min(list_.threshold(), open_.lower());
    for (std::size_t r = 0; r < root_.space().n_responses; ++r)
      proof.response_lower_bound.push_back(std::min(list_.threshold(), open_.lower(r)));
    return proof;
  }

  const RootGram& root_;
  Scope scope_;
  const Limits& limits_;
  Effort effort_;
  Shortlist list_;
  Incumbents incumbents_;
  OpenNodes open_;
  std::vector<Node> roots_;  ///< as far as their actions were struck off
  std::uint64_t nodes_ = 0;
  double work_ = 0.0, work_of_sweeps_ = 0.0;
  bool newton_ = false;
};

}  // namespace

Proof prove(const RootGram& root, const Restriction& restriction, const Limits& limits,
            std::span<const search::Choice> hints, const Effort& effort) {
  return Tree(root, restriction, limits, effort).run(hints);
}

Proof prove(const RootGram& root, const Restriction& restriction, const Limits& limits,
            std::span<const search::Choice> hints) {
  return prove(root, restriction, limits, hints, Effort{});
}

}  // namespace formsieve::proof

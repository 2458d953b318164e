#include "proof/bounded_estimate.hpp"

#include "base/parallel.hpp"
#include "proof/leaf_work.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>
#include <random>
#include <utility>

namespace formsieve::proof {

namespace {

/// A node of the tree as far as it was looked at.
struct Seen {
  double in_leaves = 0.0;      ///< candidates
  double left = 0.0;           ///< candidates that were not cut: in leaves and below
  std::vector<Node> unworked;  ///< children
  std::vector<Seen> children;  ///< once they were worked on
};

double size_of(const RootGram& root, const Node& node) {
  return count_candidates(root.space(), node.actions).convert_to<double>();
}

/// Estimates of one dive.
struct Dive {
  double visits = 0.0, nodes = 0.0;
};

class Diver {
 public:
  Diver(const RootGram& root, std::size_t response, double largest_rss, const BoundedWalkOptions& options,
        const EstimateEffort& effort)
      : root_(root),
        scope_(scope_of_response(root, response)),
        frozen_(freeze(root, scope_, largest_rss, [&options] { return options.stop.stop_requested(); })),
        options_(options),
        effort_(effort),
        random_(effort.seed) {
    top_ = seen_of(work(root_node(scope_, scope_.responses.front())));
  }

  Dive dive() { return dive_from(top_); }
  /// True when no node is left to be looked at.
  bool complete() const { return n_unworked_ == 0; }
  std::uint64_t n_nodes() const { return n_nodes_; }
  double seconds() const { return seconds_; }
  /// All leaves seen.
  double in_leaves() const { return in_leaves_; }

 private:
  double now() const { return effort_.seconds ? effort_.seconds() : 0.0; }

  LeafWork work(Node node) const { return work_on_leaves(frozen_, options_.effort, std::move(node)); }

  Seen seen_of(LeafWork found) {
    Seen seen;
    ++n_nodes_;
    for (const Leaf& leaf : found.leaves) seen.in_leaves += leaf.size.convert_to<double>();
    if (found.unfinished) found.children.push_back(std::move(*found.unfinished));
    seen.left = seen.in_leaves;
    for (const Node& child : found.children) seen.left += size_of(root_, child);
    seen.unworked = std::move(found.children);
    n_unworked_ += seen.unworked.size();
    in_leaves_ += seen.in_leaves;
    return seen;
  }

  void work_on_children(Seen& at) {
    if (at.unworked.empty()) return;
    const double begun = now();
    std::vector<LeafWork> results(at.unworked.size());
    base::parallel_for(results.size(), options_.threads,
                       [&](std::size_t i) { results[i] = work(std::move(at.unworked[i])); });
    n_unworked_ -= results.size();
    at.unworked.clear();
    for (LeafWork& result : results) at.children.push_back(seen_of(std::move(result)));
    seconds_ += now() - begun;
  }

  Dive dive_from(Seen& at) {
    if (options_.stop.stop_requested()) return {};
    work_on_children(at);
    Dive result{at.in_leaves, 1.0};
    double left = 0.0;
    for (const Seen& child : at.children) left += child.left;
    result.nodes += static_cast<double>(
        std::count_if(at.children.begin(), at.children.end(), [](const Seen& child) { return !(child.left > 0.0); }));
    if (!(left > 0.0)) return result;
    double place = std::ldexp(static_cast<double>(random_() >> 11U), -53) * left;
    auto chosen = at.children.begin();
    for (auto child = at.children.begin(); child != at.children.end(); ++child) {
      if (!(child->left > 0.0)) continue;
      chosen = child;
      if (place < child->left) break;
      place -= child->left;
    }
    const double weight = left / chosen->left;
    const Dive below = dive_from(*chosen);
    result.visits += weight * below.visits;
    result.nodes += weight * below.nodes;
    return result;
  }

  const RootGram& root_;
  Scope scope_;
  Frozen frozen_;
  const BoundedWalkOptions& options_;
  const EstimateEffort& effort_;
  std::mt19937_64 random_;
  Seen top_;
  std::uint64_t n_nodes_ = 0, n_unworked_ = 0;
  double in_leaves_ = 0.0, seconds_ = 0.0;
};

VisitEstimate average(Diver& diver, const EstimateEffort& effort) {
  std::vector<Dive> dives;
  while (!diver.complete() && (dives.size() < 2 || (dives.size() < effort.dives && diver.n_nodes() < effort.nodes)))
    dives.push_back(diver.dive());
  VisitEstimate estimate;
  estimate.n_dives = dives.size();
  estimate.node_seconds = diver.seconds() / static_cast<double>(std::max<std::uint64_t>(diver.n_nodes(), 1));
  if (diver.complete()) {
    estimate.visits = diver.in_leaves();
    estimate.nodes = static_cast<double>(diver.n_nodes());
    return estimate;
  }
  const auto n = static_cast<double>(dives.size());
  for (const Dive& dive : dives) {
    estimate.visits += dive.visits / n;
    estimate.nodes += dive.nodes / n;
  }
  double squares = 0.0;
  for (const Dive& dive : dives) squares += std::pow(dive.visits - estimate.visits, 2);
  estimate.standard_error = std::sqrt(squares / (n - 1.0) / n);
  return estimate;
}

VisitEstimate unknown() {
  constexpr double kInfinity = std::numeric_limits<double>::infinity();
  return {kInfinity, kInfinity, kInfinity, 0.0, 0};
}

}  // namespace

std::vector<VisitEstimate> estimate_visits(const search::Space& space, const base::GramSet& grams,
                                           const HeldOutRows& rows, const BoundedWalkOptions& options,
                                           const EstimateEffort& effort, std::span<const search::Choice> hints) {
  const Problem problem = problem_of_leaves(space, grams);
  const RootGram root(problem);
  std::vector<VisitEstimate> estimates;
  for (std::size_t r = 0; r < space.n_responses; ++r) {
    HeldList list(options.keep);
    start_list(space, grams, r, hints, options.start, options.stop, list);
    const double largest_rss = HeldOutScale(grams, r, rows).largest_rss(list.worst());
    Diver diver(root, r, largest_rss, options, effort);
    VisitEstimate estimate = average(diver, effort);
    estimates.push_back(options.stop.stop_requested() ? unknown() : estimate);
  }
  return estimates;
}

}  // namespace formsieve::proof

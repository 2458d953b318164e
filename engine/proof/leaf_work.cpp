#include "proof/leaf_work.hpp"

#include "proof/branching.hpp"
#include "proof/leaf_bound.hpp"
#include "proof/settle.hpp"

#include <algorithm>
#include <bit>
#include <cmath>

namespace formsieve::proof {

namespace {

/// How fast an action's weight falls with its bound's distance from the node's, in units of the gap: the predictor
/// branched on has the smallest mean weight.
constexpr double kBranchDecay = 4.0;

Leaf leaf_of(const Frozen& frozen, const Node& node) {
  return {node.actions, node.lower, count_candidates(frozen.root->space(), node.actions)};
}

/// The open predictor whose actions' bounds lie furthest above the node's.
std::size_t branching_predictor(const Frozen& frozen, const Reduced& problem, const Node& node, const Bound& bound) {
  const double gap = std::max(frozen.threshold - node.lower, 1e-6);
  std::size_t chosen = 0;
  double smallest = std::numeric_limits<double>::infinity();
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    double sum = 0.0;
    int n = 0;
    for (std::size_t a = 0; a < bound.action[j].size(); ++a) {
      if ((node.actions[problem.open[j].predictor] & bit_of(problem.open[j], a)) == 0) continue;
      sum += std::exp(-kBranchDecay * (bound.action[j][a] - node.lower) / gap);
      ++n;
    }
    if (n < 2 || sum / n >= smallest) continue;
    smallest = sum / n;
    chosen = j;
  }
  return chosen;
}

std::vector<Node> branch(const Frozen& frozen, const Reduced& problem, const Node& node, const Bound& bound) {
  const bool bounded = !bound.action.empty();
  const std::size_t j = bounded ? branching_predictor(frozen, problem, node, bound) : strongest_predictor(problem);
  std::vector<Node> children = children_of(problem, node, j, bound);
  // the most promising is worked on first: the last
  std::stable_sort(children.begin(), children.end(), [](const Node& a, const Node& b) { return a.lower > b.lower; });
  return children;
}

/// Makes leaves of their own of the forms that are all but determined by the fixed columns: their pivots decide in the
/// walk, which finds at once whether it may enter. True when there were any.
bool peel_inseparable(const Frozen& frozen, const Reduced& problem, Node& node, LeafWork& work) {
  bool any = false;
  for (const OpenPredictor& predictor : problem.open) {
    for (const OpenForm& form : predictor.forms) {
      if (form.separable) continue;
      const Actions bit = Actions{2} << form.form;
      Node peeled = node;
      peeled.actions[predictor.predictor] = bit;
      work.leaves.push_back(leaf_of(frozen, peeled));
      node.actions[predictor.predictor] &= ~bit;
      any = true;
    }
  }
  return any;
}

bool small_enough(const Frozen& frozen, const LeafEffort& effort, const Node& node) {
  return count_candidates(frozen.root->space(), node.actions) <= std::max<std::uint64_t>(effort.leaf_size, 1);
}

void work_through(const Frozen& frozen, const LeafEffort& effort, Node& node, LeafWork& work) {
  if (node.lower > frozen.threshold + kTolerance) return;
  while (settle(*frozen.root, *frozen.scope, node)) {
    const Reduced problem = reduce(*frozen.root, node.response, node.actions);
    if (!problem.separable || problem.open.empty()) {
      work.leaves.push_back(leaf_of(frozen, node));
      return;
    }
    if (peel_inseparable(frozen, problem, node, work)) continue;
    Refined refined;
    if (std::isfinite(frozen.threshold)) refined = refine_by_rss(frozen, effort, problem, node);
    if (refined.standing == Standing::cut) return;
    if (refined.standing == Standing::changed) continue;
    if (refined.standing == Standing::expired) {
      work.unfinished = std::move(node);
    } else if (small_enough(frozen, effort, node)) {
      work.leaves.push_back(leaf_of(frozen, node));
    } else {
      work.children = branch(frozen, problem, node, refined.bound);
    }
    return;
  }
}

}  // namespace

Scope scope_of_response(const RootGram& root, std::size_t response) {
  Restriction restriction;
  restriction.response = response;
  return scope_of(root, restriction);
}

Frozen freeze(const RootGram& root, const Scope& scope, double largest_rss, const std::function<bool()>& expired) {
  Frozen frozen;
  frozen.root = &root;
  frozen.scope = &scope;
  frozen.threshold = largest_rss > 0.0 ? static_cast<double>(root.problem().grams->n_rows) * std::log(largest_rss)
                                       : -std::numeric_limits<double>::infinity();
  frozen.expired = expired;
  return frozen;
}

LeafWork work_on_leaves(const Frozen& frozen, const LeafEffort& effort, Node node) {
  LeafWork work;
  work.n_cut = count_candidates(frozen.root->space(), node.actions);
  work_through(frozen, effort, node, work);
  for (const Leaf& leaf : work.leaves) work.n_cut -= leaf.size;
  for (const Node& child : work.children) work.n_cut -= count_candidates(frozen.root->space(), child.actions);
  if (work.unfinished) work.n_cut -= count_candidates(frozen.root->space(), work.unfinished->actions);
  return work;
}

}  // namespace formsieve::proof

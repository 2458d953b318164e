#include "search/subspace_walk.hpp"

#include "search/saturating.hpp"
#include "search/space_walker.hpp"

#include <algorithm>
#include <set>
#include <compare>
#include <utility>

namespace formsieve::search {

namespace {

/// The subspace as a space of the same predictors with fewer forms.
Space smaller_space(const Space& space, const Subspace& subspace) {
  Space result;
  result.n_responses = space.n_responses;
  result.max_terms = space.max_terms;
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    PredictorChoices predictor;
    predictor.always = subspace.choices[j].front() != 0;
    for (const std::uint16_t choice : subspace.choices[j])
      if (choice != 0) predictor.forms.push_back(space.predictors[j].forms[choice - 1u]);
    result.predictors.push_back(std::move(predictor));
  }
  return result;
}

Held held_of(const Listed& listed, std::size_t n_predictors) {
  Held held{std::vector<std::uint16_t>(n_predictors, 0), listed.cv_sse, listed.rss, listed.n_columns};
  for (const TermCode term : listed.terms) held.choice[predictor_of(term)] = choice_of(term);
  return held;
}

/// The node of the whole walk at which a candidate is scored.
struct WalkNode {
  OuterPath outer;
  std::vector<std::size_t> lanes;
  auto operator<=>(const WalkNode&) const = default;
};

WalkNode node_of(const OuterTree& tree, const std::vector<std::uint16_t>& choice) {
  WalkNode node;
  for (std::size_t form = 0; form < tree.forms().size(); ++form) {
    const OuterForm& outer = tree.forms()[form];
    if (choice[outer.predictor] == outer.choice) node.outer.push_back(form);
  }
  std::reverse(node.outer.begin(), node.outer.end());  // groups fall, and forms stand by rising groups
  const std::vector<std::size_t> open = tree.open_simple(node.outer);
  const PairShape shape = tree.shape(open, tree.most_terms() - node.outer.size());
  for (std::size_t p = open.size(); p-- > 0;) {
    const SimplePredictor& simple = tree.simple()[open[p]];
    const auto at = std::find(simple.choices.begin(), simple.choices.end(), choice[simple.predictor]);
    if (at == simple.choices.end()) continue;
    node.lanes.push_back(shape.first_lane[p] + static_cast<std::size_t>(at - simple.choices.begin()));
  }
  // the last two are scored as a pair of the node before them
  node.lanes.resize(node.lanes.size() - std::min<std::size_t>(node.lanes.size(), 2));
  return node;
}

/// Lets everything pass that is not above the worst of the candidates, whatever the order of eliminations changed.
PoolRule rule_for(const base::GramSet& grams, std::size_t response, std::span<const Held> candidates) {
  constexpr double kRounding = 1e-6;
  double limit = 0.0;
  for (const Held& candidate : candidates) limit = std::max(limit, candidate.cv_sse);
  for (const auto& validation : grams.validation)
    limit += kRounding * validation[(grams.n_columns + response) * (grams.order() + 1)];
  // other candidates of the same nodes are offered too
  PoolRule rule{Score::cv_sse, 4 * candidates.size() + 1000, {}, std::vector<double>(grams.n_responses, -1.0)};
  rule.limit[response] = limit;
  return rule;
}

void walk_nodes_of(const OuterTree& tree, std::span<const Held> candidates, SpaceWalker& walker) {
  std::set<WalkNode> nodes;
  for (const Held& candidate : candidates) nodes.insert(node_of(tree, candidate.choice));
  const std::uint64_t largest = largest_subtree(tree);
  for (const WalkNode& node : nodes) walker.walk_node(node.outer, node.lanes, largest);
}

std::vector<Held> those_of(std::span<const Held> candidates, std::span<const Listed> offered,
                           std::size_t n_predictors) {
  std::set<std::vector<std::uint16_t>> wanted;
  for (const Held& candidate : candidates) wanted.insert(candidate.choice);
  std::vector<Held> result;
  for (const Listed& listed : offered) {
    Held held = held_of(listed, n_predictors);
    if (wanted.contains(held.choice)) result.push_back(std::move(held));
  }
  std::sort(result.begin(), result.end(), better_held);
  return result;
}

}  // namespace

bool better_held(const Held& a, const Held& b) {
  if (a.cv_sse != b.cv_sse) return a.cv_sse < b.cv_sse;
  return a.choice < b.choice;
}

SubspaceResult walk_subspace(const Space& space, const base::GramSet& grams, const Subspace& subspace, std::size_t keep,
                             double limit, std::stop_token stop) {
  const Space smaller = smaller_space(space, subspace);
  WalkOptions options;
  options.rules = {{Score::cv_sse, keep, {}, std::vector<double>(space.n_responses, limit)}};
  options.stop = std::move(stop);
  const WalkSetup setup(smaller, grams, options, subspace.response, 1, {});
  SubspaceResult result;
  if (!setup.tree.possible()) return result;
  SpaceWalker walker(setup);
  walker.walk(Part{{}, {}, true}, kCountless);
  result.n_scored = walker.n_scored();
  result.n_inseparable = walker.n_inseparable();
  result.complete = !walker.stopped();
  for (const Listed& listed : walker.list(0, 0).entries()) {
    Held held = held_of(listed, space.predictors.size());
    for (std::size_t j = 0; j < held.choice.size(); ++j) {
      if (held.choice[j] == 0) continue;
      const std::vector<std::uint16_t>& choices = subspace.choices[j];
      held.choice[j] = choices[held.choice[j] - (choices.front() == 0 ? 0u : 1u)];
    }
    result.best.push_back(std::move(held));
  }
  std::sort(result.best.begin(), result.best.end(), better_held);
  return result;
}

std::vector<Held> scored_as_in_walk(const Space& space, const base::GramSet& grams, std::size_t response,
                                    std::span<const Held> candidates) {
  if (candidates.empty()) return {};
  // the same responses side by side as in walk(): its order of predictors depends on the first of them
  const std::size_t first = response / kMostResponses * kMostResponses;
  const std::size_t n = std::min(kMostResponses, space.n_responses - first);
  WalkOptions options;
  options.rules = {rule_for(grams, response, candidates)};
  for (;;) {
    PoolRule& rule = options.rules.front();
    const WalkSetup setup(space, grams, options, first, n);
    SpaceWalker walker(setup);
    walk_nodes_of(setup.tree, candidates, walker);
    const auto offered = walker.list(0, response - first).entries();
    std::vector<Held> result = those_of(candidates, offered, space.predictors.size());
    if (result.size() == candidates.size() || offered.size() < rule.keep) return result;
    rule.keep *= 8;
  }
}

}  // namespace formsieve::search

#include "proof/refinement.hpp"

#include <algorithm>

namespace formsieve::proof {

CountRange range_of(const Frozen& frozen, const Node& node) {
  return {node.fewest_columns, node.most_columns, frozen.scope->fewest_terms, frozen.scope->most_terms};
}

Narrowed narrow(const Frozen& frozen, const Reduced& problem, const Bound& bound, Node& node) {
  const double limit = frozen.threshold + kTolerance;
  Narrowed narrowed;
  node.lower = std::max(node.lower, bound.lower);
  narrowed.cut = node.lower > limit || bound.fewest_columns > bound.most_columns;
  if (narrowed.cut || !frozen.effort.strike) return narrowed;
  node.fewest_columns = std::max(node.fewest_columns, bound.fewest_columns);
  node.most_columns = std::min(node.most_columns, bound.most_columns);
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    const OpenPredictor& predictor = problem.open[j];
    Actions& actions = node.actions[predictor.predictor];
    for (std::size_t a = 0; a < bound.action[j].size(); ++a) {
      const bool absence = a == predictor.forms.size();
      const Actions bit = absence ? Actions{1} : Actions{2} << predictor.forms[a].form;
      if ((actions & bit) == 0 || !(bound.action[j][a] > limit)) continue;
      actions &= ~bit;
      ++narrowed.n_struck;
    }
    narrowed.cut = narrowed.cut || actions == 0;
  }
  return narrowed;
}

}  // namespace formsieve::proof

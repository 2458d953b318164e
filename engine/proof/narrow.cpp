#include "proof/refinement.hpp"

#include <algorithm>

namespace formsieve::proof {

CountRange range_of(const Frozen& frozen, const Node& node) {
  return {node.fewest_columns, node.most_columns, frozen.scope->fewest_terms, frozen.scope->most_terms};
}

namespace {

Narrowed apply(const Frozen& frozen, const Reduced& problem, const Bound& bound, Node& node) {
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
      const Actions bit = bit_of(predictor, a);
      if ((actions & bit) == 0 || !(bound.action[j][a] > limit)) continue;
      actions &= ~bit;
      ++narrowed.n_struck;
    }
    narrowed.cut = narrowed.cut || actions == 0;
  }
  return narrowed;
}

/// What a reduced problem was made of.
std::vector<Actions> actions_of(const Reduced& problem) {
  std::vector<Actions> actions;
  for (const std::uint16_t choice : problem.fixed) actions.push_back(Actions{1} << choice);
  for (const OpenPredictor& predictor : problem.open) {
    Actions& own = actions[predictor.predictor];
    own = predictor.must ? 0 : 1;
    for (const OpenForm& form : predictor.forms) own |= Actions{2} << form.form;
  }
  return actions;
}

}  // namespace

Narrowed narrow(const Frozen& frozen, const Reduced& problem, const Bound& bound, const Eigen::MatrixXd& d,
                const Eigen::VectorXd& v, Node& node, Account& account) {
  if (account.steps == nullptr) return apply(frozen, problem, bound, node);
  Certificate::Step step{Certificate::Reason::bound, part_of(node), {}, false, actions_of(problem), d, v};
  const Narrowed narrowed = apply(frozen, problem, bound, node);
  step.after = part_of(node);
  step.nothing_left = narrowed.cut;
  account.steps->push_back(std::move(step));
  return narrowed;
}

}  // namespace formsieve::proof

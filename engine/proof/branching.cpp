#include "proof/branching.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace formsieve::proof {

std::size_t strongest_predictor(const Reduced& problem) {
  std::size_t chosen = 0;
  double most = -1.0;
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    for (const OpenForm& form : problem.open[j].forms) {
      const double diagonal = problem.m(form.first, form.first);
      const double gain = diagonal > 0.0 ? std::pow(problem.b(form.first), 2) / diagonal : 0.0;
      if (gain <= most) continue;
      most = gain;
      chosen = j;
    }
  }
  return chosen;
}

std::vector<Node> children_of(const Reduced& problem, const Node& node, std::size_t j, const Bound& bound) {
  const OpenPredictor& predictor = problem.open[j];
  std::vector<Node> children;
  for (std::size_t a = 0; a <= predictor.forms.size(); ++a) {
    const Actions bit = bit_of(predictor, a);
    if ((node.actions[predictor.predictor] & bit) == 0) continue;
    Node child = node;
    child.actions[predictor.predictor] = bit;
    if (!bound.action.empty()) child.lower = std::max(child.lower, bound.action[j][a]);
    ++child.depth;
    children.push_back(std::move(child));
  }
  return children;
}

}  // namespace formsieve::proof

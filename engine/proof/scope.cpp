#include "proof/scope.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

bool Scope::contains(std::size_t response, std::span<const std::uint16_t> choice) const {
  if (choice.size() != actions.size()) return false;
  if (std::find(responses.begin(), responses.end(), response) == responses.end()) return false;
  std::size_t terms = 0;
  for (std::size_t j = 0; j < choice.size(); ++j) {
    if (choice[j] > kMostForms || (actions[j] >> choice[j] & 1) == 0) return false;
    if (choice[j] != 0) ++terms;
  }
  return terms >= fewest_terms && terms <= most_terms;
}

Scope scope_of(const RootGram& root, const Restriction& restriction) {
  Scope scope;
  for (std::size_t r = 0; r < root.space().n_responses; ++r)
    if (!restriction.response || *restriction.response == r) scope.responses.push_back(r);
  scope.actions = root.all_actions();
  for (const auto& [predictor, actions] : restriction.actions) scope.actions.at(predictor) &= actions;
  scope.fewest_terms = restriction.fewest_terms;
  scope.most_terms =
      std::min({restriction.most_terms, root.space().max_terms.value_or(root.n_predictors()), root.n_predictors()});
  const std::vector<double>& penalty = root.problem().penalty;
  while (scope.most_columns + 1 < penalty.size() && std::isfinite(penalty[scope.most_columns + 1]))
    ++scope.most_columns;
  return scope;
}

}  // namespace formsieve::proof

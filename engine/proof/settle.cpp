#include "proof/settle.hpp"

#include <algorithm>
#include <bit>
#include <limits>

namespace formsieve::proof {

namespace {

struct Widths {
  std::size_t least = std::numeric_limits<std::size_t>::max();
  std::size_t most = 0;
};

/// Of the forms among a predictor's actions.
Widths widths_of(const search::PredictorChoices& predictor, Actions actions) {
  Widths widths;
  for (std::size_t f = 0; f < predictor.forms.size(); ++f) {
    if ((actions >> (f + 1) & 1) == 0) continue;
    widths.least = std::min(widths.least, predictor.forms[f].n_columns);
    widths.most = std::max(widths.most, predictor.forms[f].n_columns);
  }
  return widths;
}

Actions forms_of_width(const search::PredictorChoices& predictor, Actions actions, std::size_t width) {
  Actions kept = 0;
  for (std::size_t f = 0; f < predictor.forms.size(); ++f)
    if (predictor.forms[f].n_columns == width) kept |= actions & (Actions{2} << f);
  return kept;
}

struct Counts {
  std::size_t fewest_terms = 0, most_terms = 0, fewest_columns = 0, most_columns = 0;
};

Counts counts_of(const RootGram& root, const Node& node) {
  Counts counts;
  for (std::size_t j = 0; j < node.actions.size(); ++j) {
    const Actions actions = node.actions[j];
    if (actions == 1) continue;
    const Widths widths = widths_of(root.space().predictors[j], actions);
    const bool must = (actions & 1) == 0;
    counts.fewest_terms += must ? 1 : 0;
    counts.fewest_columns += must ? widths.least : 0;
    ++counts.most_terms;
    counts.most_columns += widths.most;
  }
  return counts;
}

/// True when an action went.
bool take_away(const RootGram& root, const Scope& scope, const Counts& counts, Node& node) {
  const bool none_more = counts.fewest_terms == scope.most_terms || counts.fewest_columns == node.most_columns;
  const bool all_in = counts.most_terms == scope.fewest_terms || counts.most_columns == node.fewest_columns;
  bool changed = false;
  for (std::size_t j = 0; j < node.actions.size(); ++j) {
    Actions& actions = node.actions[j];
    if (std::has_single_bit(actions)) continue;
    const Actions before = actions;
    const search::PredictorChoices& predictor = root.space().predictors[j];
    const Widths widths = widths_of(predictor, actions);
    const bool optional = (actions & 1) != 0;
    if (none_more && optional) actions = 1;
    if (all_in) actions &= ~Actions{1};
    if (counts.fewest_columns == node.most_columns && !optional)
      actions &= forms_of_width(predictor, actions, widths.least);
    if (counts.most_columns == node.fewest_columns) actions &= forms_of_width(predictor, actions, widths.most);
    changed = changed || actions != before;
  }
  return changed;
}

}  // namespace

bool settle(const RootGram& root, const Scope& scope, Node& node) {
  for (;;) {
    if (std::find(node.actions.begin(), node.actions.end(), Actions{0}) != node.actions.end()) return false;
    const Counts counts = counts_of(root, node);
    if (counts.fewest_terms > scope.most_terms || counts.most_terms < scope.fewest_terms) return false;
    node.fewest_columns = std::max(node.fewest_columns, counts.fewest_columns);
    node.most_columns = std::min(node.most_columns, counts.most_columns);
    if (node.fewest_columns > node.most_columns) return false;
    if (!take_away(root, scope, counts, node)) return true;
  }
}

}  // namespace formsieve::proof

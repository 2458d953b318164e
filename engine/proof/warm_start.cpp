#include "proof/warm_start.hpp"

#include "base/parallel.hpp"
#include "proof/incumbents.hpp"
#include "proof/node_work.hpp"
#include "proof/refinement.hpp"
#include "proof/settle.hpp"
#include "proof/shortlist.hpp"

namespace formsieve::proof {

namespace {

/// Sweeps at a root until they gain little, nothing struck off. They aim at the best that local search finds for this
/// response form, so that no bound lies above it.
std::shared_ptr<const Inherited> sweep_root(const RootGram& root, const Scope& scope, const Effort& effort) {
  Shortlist list(1, 0.0);
  Incumbents(root, scope, list, [] { return false; }).start();
  Frozen frozen;
  frozen.root = &root;
  frozen.scope = &scope;
  frozen.effort = effort;
  frozen.effort.strike = false;
  frozen.threshold = list.threshold();
  if (const Listed* best = list.best()) {
    frozen.best_score = best->score;
    frozen.best_columns = best->n_columns;
    frozen.best_choice = best->choice.choice;
  }
  Node node = root_node(scope, scope.responses.front());
  if (!settle(root, scope, node)) return nullptr;
  const Reduced problem = reduce(root, node.response, node.actions);
  if (!problem.separable || problem.open.empty()) return nullptr;
  Account account{0.0, nullptr};
  refine_by_sweeps(frozen, problem, node, account);
  return node.inherited;
}

}  // namespace

WarmStart warm_start(const RootGram& root, const Restriction& restriction, unsigned threads, const Effort& effort) {
  const Scope all = scope_of(root, restriction);
  WarmStart start;
  start.roots.resize(root.space().n_responses);
  base::parallel_for(all.responses.size(), threads, [&](std::size_t i) {
    Scope scope = all;
    scope.responses = {all.responses[i]};
    start.roots[all.responses[i]] = sweep_root(root, scope, effort);
  });
  return start;
}

WarmStart warm_start(const RootGram& root, const Restriction& restriction, unsigned threads) {
  return warm_start(root, restriction, threads, Effort{});
}

}  // namespace formsieve::proof

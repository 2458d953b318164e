#include "proof/leaves.hpp"

#include "base/parallel.hpp"
#include "proof/leaf_work.hpp"

#include <algorithm>
#include <bit>
#include <cassert>
#include <cmath>

namespace formsieve::proof {

search::BigCount count_candidates(const search::Space& space, std::span<const Actions> actions) {
  const std::size_t most_terms = space.max_terms.value_or(actions.size());
  search::BigCount product = 1;
  std::size_t optional = 0;
  std::size_t must = 0;
  for (const Actions a : actions) {
    if (a == 0) return 0;
    product *= static_cast<unsigned>(std::popcount(a));
    if ((a & 1) == 0) ++must;
    if ((a & 1) != 0 && a != 1) ++optional;
  }
  if (must + optional <= most_terms) return product;
  if (must > most_terms) return 0;
  std::vector<search::BigCount> by_terms(most_terms + 1, 0);
  by_terms[0] = 1;
  for (const Actions a : actions) {
    const unsigned absent = a & 1;
    const auto forms = static_cast<unsigned>(std::popcount(a)) - absent;
    for (std::size_t k = most_terms + 1; k-- > 0;)
      by_terms[k] = by_terms[k] * absent + (k > 0 ? search::BigCount(by_terms[k - 1] * forms) : search::BigCount(0));
  }
  search::BigCount total = 0;
  for (const search::BigCount& count : by_terms) total += count;
  return total;
}

LeafTree::LeafTree(const RootGram& root, std::size_t response, const LeafEffort& effort)
    : root_(&root), effort_(effort), scope_(scope_of_response(root, response)) {
  open_.push_back(root_node(scope_, response));
}
LeafTree::~LeafTree() = default;
LeafTree::LeafTree(LeafTree&&) noexcept = default;

bool LeafTree::done() const { return open_.empty(); }

search::BigCount LeafTree::n_open() const {
  search::BigCount count = 0;
  for (const Node& node : open_) count += count_candidates(root_->space(), node.actions);
  return count;
}

std::vector<Leaf> LeafTree::grow(double largest_rss, unsigned threads, const std::function<bool()>& expired) {
  const std::size_t n = std::min(effort_.batch, open_.size());
  std::vector<Node> batch(std::move_iterator(open_.end() - static_cast<std::ptrdiff_t>(n)),
                          std::move_iterator(open_.end()));
  open_.resize(open_.size() - n);
  const Frozen frozen = freeze(*root_, scope_, largest_rss, expired);
  std::vector<LeafWork> results(n);
  base::parallel_for(n, threads,
                     [&](std::size_t i) { results[i] = work_on_leaves(frozen, effort_, std::move(batch[i])); });
  std::vector<Leaf> leaves;
  for (LeafWork& result : results) {
    n_cut_ += result.n_cut;
    for (Node& child : result.children) open_.push_back(std::move(child));
    if (result.unfinished) open_.push_back(std::move(*result.unfinished));
  }
  for (std::size_t i = n; i-- > 0;)  // the most promising first
    for (Leaf& leaf : results[i].leaves) leaves.push_back(std::move(leaf));
  n_nodes_ += n;
  return leaves;
}

}  // namespace formsieve::proof

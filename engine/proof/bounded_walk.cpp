#include "proof/bounded_walk.hpp"

#include "base/parallel.hpp"

#include <algorithm>
#include <bit>
#include <cassert>
#include <utility>

namespace formsieve::proof {

namespace {

search::Subspace subspace_of(std::size_t response, const Leaf& leaf) {
  search::Subspace subspace{response, {}};
  for (Actions actions : leaf.actions) {
    auto& choices = subspace.choices.emplace_back();
    for (; actions != 0; actions &= actions - 1)
      choices.push_back(static_cast<std::uint16_t>(std::countr_zero(actions)));
  }
  return subspace;
}

/// The walk of one response form.
class ResponseWalk {
 public:
  ResponseWalk(const search::Space& space, const RootGram& root, const HeldOutRows& rows,
               const BoundedWalkOptions& options, std::size_t response)
      : space_(space),
        grams_(*root.problem().grams),
        options_(options),
        response_(response),
        scale_(grams_, response, rows),
        tree_(root, response, options.effort),
        list_(options.keep) {}

  void start(std::span<const search::Choice> hints) {
    counts_.n_start = start_list(space_, grams_, response_, hints, options_.start, options_.stop, list_);
  }

  bool done() const { return tree_.done(); }

  /// Grows the tree by a batch and walks its leaves.
  void advance(const std::function<bool()>& expired) {
    const std::vector<Leaf> leaves = tree_.grow(scale_.largest_rss(list_.worst()), options_.threads, expired);
    const double limit = scale_.with_rounding(list_.worst());
    std::vector<search::SubspaceResult> results(leaves.size());
    base::parallel_for(leaves.size(), options_.threads, [&](std::size_t i) {
      results[i] = search::walk_subspace(space_, grams_, subspace_of(response_, leaves[i]), list_.capacity(), limit,
                                         options_.stop);
    });
    std::vector<search::Held> found;
    for (std::size_t i = 0; i < leaves.size(); ++i) {
      std::move(results[i].best.begin(), results[i].best.end(), std::back_inserter(found));
      counts_.n_scored += results[i].n_scored;
      counts_.n_inseparable += results[i].n_inseparable;
      n_unvisited_ += leaves[i].size - results[i].n_scored - results[i].n_inseparable;
    }
    counts_.n_leaves += leaves.size();
    list_.add(std::move(found));
  }

  BoundedCounts counts() const {
    BoundedCounts counts = counts_;
    counts.n_cut = tree_.n_cut();
    counts.n_open = tree_.n_open() + n_unvisited_;
    counts.n_nodes = tree_.n_nodes();
    return counts;
  }

  std::vector<search::Scored> list() const {
    const double scale = grams_.response_scale[response_];
    std::vector<search::Scored> result;
    for (const search::Held& held : search::scored_as_in_walk(space_, grams_, response_, list_.entries())) {
      if (result.size() == options_.keep) break;
      const search::Choice choice{response_, held.choice};
      result.push_back({choice, search::number_of(space_, choice), held.cv_sse * scale * scale,
                        held.rss * scale * scale, held.n_columns});
    }
    return result;
  }

 private:
  const search::Space& space_;
  const base::GramSet& grams_;
  const BoundedWalkOptions& options_;
  std::size_t response_;
  HeldOutScale scale_;
  LeafTree tree_;
  HeldList list_;
  BoundedCounts counts_;
  search::BigCount n_unvisited_ = 0;  ///< in leaves that a stop cut short
};

double share_done(const std::vector<ResponseWalk>& walks, const search::BigCount& total) {
  search::BigCount open = 0;
  for (const ResponseWalk& walk : walks) open += walk.counts().n_open;
  return total == 0 ? 1.0 : 1.0 - open.convert_to<double>() / total.convert_to<double>();
}

}  // namespace

Problem problem_of_leaves(const search::Space& space, const base::GramSet& grams) {
  Problem problem;
  problem.space = &space;
  problem.grams = &grams;
  problem.penalty.assign(grams.n_columns + 1, 0.0);
  problem.constant.assign(grams.n_responses, 0.0);
  return problem;
}

BoundedWalk bounded_walk(const search::Space& space, const base::GramSet& grams, const HeldOutRows& rows,
                         const BoundedWalkOptions& options, std::span<const search::Choice> hints) {
  assert(space.n_responses == grams.n_responses);
  const std::function<bool()> expired = [&] {
    return options.stop.stop_requested() || (options.enough && options.enough());
  };
  const Problem problem = problem_of_leaves(space, grams);
  const RootGram root(problem);
  const search::BigCount total = search::count(space);
  std::vector<ResponseWalk> walks;
  for (std::size_t r = 0; r < space.n_responses; ++r) walks.emplace_back(space, root, rows, options, r);
  for (ResponseWalk& walk : walks)
    if (!expired()) walk.start(hints);
  // response forms take turns, so that a time limit finds all of them about equally far
  const auto open = [](const ResponseWalk& walk) { return !walk.done(); };
  while (!expired() && std::any_of(walks.begin(), walks.end(), open)) {
    for (ResponseWalk& walk : walks)
      if (!walk.done() && !expired()) walk.advance(expired);
    if (options.progress) options.progress(share_done(walks, total));
  }
  BoundedWalk result;
  for (const ResponseWalk& walk : walks) {
    result.lists.push_back(walk.list());
    result.counts.push_back(walk.counts());
    result.complete = result.complete && result.counts.back().n_open == 0;
  }
  return result;
}

}  // namespace formsieve::proof

#include "plain/walk.hpp"

#include "base/parallel.hpp"
#include "plain/partial_grams.hpp"
#include "plain/subtree_walker.hpp"
#include "plain/tasks.hpp"
#include "plain/tree.hpp"

#include <algorithm>
#include <atomic>
#include <cassert>
#include <memory>
#include <mutex>

namespace formsieve::plain {

using namespace search;

namespace {

/// Lends a walker to each part that is being walked: as many walkers as parts at one time, hence at most one a thread.
class Workers {
 public:
  Workers(const Tree& tree, const Root& root, const WalkOptions& options)
      : tree_(tree), root_(root), options_(options) {}

  void walk(const Path& path) {
    if (options_.stop.stop_requested()) {
      stopped_ = true;
      return;
    }
    SubtreeWalker* const walker = take();
    if (walker->enter(path)) walker->walk();
    const std::scoped_lock lock(mutex_);
    idle_.push_back(walker);
  }

  const std::vector<std::unique_ptr<SubtreeWalker>>& all() const { return all_; }
  /// True when a part was left out because a stop was requested.
  bool stopped() const { return stopped_; }

 private:
  SubtreeWalker* take() {
    const std::scoped_lock lock(mutex_);
    if (idle_.empty()) {
      all_.push_back(std::make_unique<SubtreeWalker>(tree_, root_, options_, largest_subtree(tree_)));
      return all_.back().get();
    }
    SubtreeWalker* const walker = idle_.back();
    idle_.pop_back();
    return walker;
  }

  const Tree& tree_;
  const Root& root_;
  const WalkOptions& options_;
  std::atomic<bool> stopped_ = false;
  std::mutex mutex_;
  std::vector<std::unique_ptr<SubtreeWalker>> all_;
  std::vector<SubtreeWalker*> idle_;
};

Scored scored(const Listed& listed, const Space& space, std::size_t response, double response_scale) {
  Scored result;
  result.choice.response = response;
  result.choice.choice.assign(space.predictors.size(), 0);
  for (const TermCode term : listed.terms) result.choice.choice[predictor_of(term)] = choice_of(term);
  result.number = number_of(space, result.choice);
  result.cv_sse = listed.cv_sse * response_scale * response_scale;
  result.rss = listed.rss * response_scale * response_scale;
  result.n_columns = listed.n_columns;
  return result;
}

/// The best of all workers' lists. Their order of candidates is total, so which worker saw which does not matter.
std::vector<Listed> merged(const Workers& workers, std::size_t rule, std::size_t response, std::size_t keep) {
  std::vector<Listed> all;
  for (const auto& walker : workers.all()) {
    const auto entries = walker->list(rule, response).entries();
    all.insert(all.end(), entries.begin(), entries.end());
  }
  std::sort(all.begin(), all.end(), better);
  all.resize(std::min(all.size(), keep));
  return all;
}

}  // namespace

WalkResult walk(const Space& space, const base::GramSet& grams, const WalkOptions& options) {
  assert(space.n_responses == grams.n_responses);
  assert(count(space) < Tree::kMostCandidates);
  const Tree tree(space);
  const Root root(tree, grams, options.smallest_pivot_rel);
  const std::vector<Path> parts = split(tree, largest_subtree(tree));
  Workers workers(tree, root, options);
  base::parallel_for(parts.size(), options.threads, [&](std::size_t i) { workers.walk(parts[i]); });

  WalkResult result;
  result.complete = !workers.stopped();
  for (const auto& walker : workers.all()) {
    result.n_scored += walker->n_scored();
    result.n_inseparable += walker->n_inseparable();
    result.complete = result.complete && !walker->stopped();
  }
  for (std::size_t rule = 0; rule < options.rules.size(); ++rule) {
    auto& lists = result.lists.emplace_back(space.n_responses);
    for (std::size_t r = 0; r < space.n_responses; ++r)
      for (const Listed& listed : merged(workers, rule, r, options.rules[rule].keep))
        lists[r].push_back(scored(listed, space, r, grams.response_scale[r]));
  }
  return result;
}

}  // namespace formsieve::plain

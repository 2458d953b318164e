#include "search/walk.hpp"

#include "base/parallel.hpp"
#include "search/parts.hpp"
#include "search/space_walker.hpp"

#include <algorithm>
#include <atomic>
#include <cassert>
#include <cmath>
#include <memory>
#include <mutex>

namespace formsieve::search {

namespace {

/// Spaces from here on are not walked: their counts would overflow.
constexpr std::uint64_t kMostCandidates = std::uint64_t{1} << 63;

/// Lends a walker to each part that is being walked: as many walkers as parts at one time, hence at most one a thread.
class Workers {
 public:
  Workers(const WalkSetup& setup, std::uint64_t largest, std::size_t n_parts)
      : setup_(setup), largest_(largest), weights_(n_parts) {}

  void walk(std::size_t i, const Part& part) {
    if (setup_.options.stop.stop_requested()) {
      stopped_ = true;
      return;
    }
    SpaceWalker* const walker = take();
    weights_[i] = walker->walk(part, largest_);
    const std::scoped_lock lock(mutex_);
    idle_.push_back(walker);
  }

  const std::vector<std::unique_ptr<SpaceWalker>>& all() const { return all_; }
  const std::vector<WeightLogs>& weights() const { return weights_; }
  /// True when a part was left out because a stop was requested.
  bool stopped() const { return stopped_; }

 private:
  SpaceWalker* take() {
    {
      const std::scoped_lock lock(mutex_);
      if (!idle_.empty()) {
        SpaceWalker* const walker = idle_.back();
        idle_.pop_back();
        return walker;
      }
    }
    // made by the thread that needs it, so that its memory is near
    auto made = std::make_unique<SpaceWalker>(setup_);
    const std::scoped_lock lock(mutex_);
    all_.push_back(std::move(made));
    return all_.back().get();
  }

  const WalkSetup& setup_;
  std::uint64_t largest_;
  std::vector<WeightLogs> weights_;
  std::atomic<bool> stopped_ = false;
  std::mutex mutex_;
  std::vector<std::unique_ptr<SpaceWalker>> all_;
  std::vector<SpaceWalker*> idle_;
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

/// Walks the space for some of its responses and adds what was found to the result.
void walk_responses(const Space& space, const base::GramSet& grams, const WalkOptions& options, std::size_t first,
                    std::size_t n, WalkResult& result) {
  const WalkSetup setup(space, grams, options, first, n);
  const std::uint64_t largest = largest_subtree(setup.tree);
  const std::vector<Part> parts = split(setup.tree, largest);
  Workers workers(setup, largest, parts.size());
  base::parallel_for(parts.size(), options.threads, [&](std::size_t i) { workers.walk(i, parts[i]); });

  result.complete = result.complete && !workers.stopped();
  for (const auto& walker : workers.all()) {
    result.n_scored += walker->n_scored();
    result.n_inseparable += walker->n_inseparable();
    result.complete = result.complete && !walker->stopped();
  }
  for (std::size_t rule = 0; rule < options.rules.size(); ++rule)
    for (std::size_t r = 0; r < n; ++r)
      for (const Listed& listed : merged(workers, rule, r, options.rules[rule].keep))
        result.lists[rule][first + r].push_back(scored(listed, space, first + r, grams.response_scale[first + r]));
  if (!setup.summary.wanted) return;
  BestStandings best(setup.cells, n);
  for (const auto& walker : workers.all()) best.lower(walker->standings());
  const auto scale = std::span(grams.response_scale).subspan(first, n);
  for (auto& summary : summarise(space, setup.cells, best, workers.weights(), scale, grams.n_rows))
    result.summary.responses.push_back(std::move(summary));
  for (std::size_t r = 0; r < n; ++r)
    result.summary.unit_sse.push_back(std::ldexp(scale[r] * scale[r], setup.unit_exponent[r]));
}

}  // namespace

WalkResult walk(const Space& space, const base::GramSet& grams, const WalkOptions& options) {
  assert(space.n_responses == grams.n_responses);
  assert(count(space) < kMostCandidates);
  WalkResult result;
  result.lists.assign(options.rules.size(), std::vector<std::vector<Scored>>(space.n_responses));
  for (std::size_t first = 0; first < space.n_responses; first += kMostResponses)
    walk_responses(space, grams, options, first, std::min(kMostResponses, space.n_responses - first), result);
  return result;
}

}  // namespace formsieve::search

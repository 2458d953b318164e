#include "search/partial_grams.hpp"
#include "search/subtree_walker.hpp"
#include "search/tree.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <chrono>
#include <iterator>
#include <limits>

namespace formsieve::search {

namespace {

/// Keeps the rate finite when nothing took any time.
constexpr double kClockResolutionSeconds = 1e-9;
/// Candidates of one response in a sampled subtree: a millisecond or so of work, far above the clock's resolution.
constexpr std::uint64_t kSampleSize = 10'000;

/// Beyond this many candidates, more than a day's work, the sample is drawn from fewer predictors: candidates at the
/// bottom of the tree, which are nearly all, cost the same, and the workspaces of a tree that no walk could visit would
/// not fit in memory.
constexpr std::uint64_t kLargestSampledSpace = std::uint64_t{1} << 40;

/// The space without its last predictors, those that are always in last of all.
Space reduced(Space space) {
  while (count(space) > kLargestSampledSpace) {
    auto last = std::find_if(space.predictors.rbegin(), space.predictors.rend(),
                             [](const PredictorChoices& predictor) { return !predictor.always; });
    if (last == space.predictors.rend()) last = space.predictors.rbegin();
    space.predictors.erase(std::next(last).base());
  }
  return space;
}

/// The i-th point of the base-2 sequence of van der Corput (1935): evenly spread in [0, 1) however many are taken.
double spread_point(std::uint64_t i) {
  double point = 0.0;
  for (double step = 0.5; i != 0; i >>= 1U, step *= 0.5)
    if ((i & 1U) != 0) point += step;
  return point;
}

/// The form, among those of predictors [first, open), in whose subtree `point` of their candidates falls; `point`
/// becomes the place within it.
std::size_t pick_at(const Tree& tree, std::size_t depth, std::size_t first, std::size_t open, double& point) {
  const auto size = [&](std::size_t f) { return static_cast<double>(tree.size(depth, tree.forms()[f].position)); };
  const std::size_t last = tree.n_forms(open) - 1;
  double total = 0.0;
  for (std::size_t f = tree.n_forms(first); f <= last; ++f) total += size(f);
  double place = point * total;
  std::size_t form = tree.n_forms(first);
  for (; form < last && place >= size(form); ++form) place -= size(form);
  point = place / size(form);
  return form;
}

/// The first subtree of at most kSampleSize candidates on the way to the candidate that stands at `point` of the space.
Path subtree_at(const Tree& tree, double point) {
  Path path;
  std::size_t open = tree.n_predictors();
  while (tree.has_children(path.size(), open) && tree.size(path.size(), open) > kSampleSize) {
    const std::size_t depth = path.size();
    const std::size_t first = std::max<std::size_t>(1, tree.first_pick(depth, open));  // nothing is below predictor 0
    if (first >= open || !tree.has_children(depth + 1, first) || tree.n_forms(first) == tree.n_forms(open)) break;
    const std::size_t form = pick_at(tree, depth + 1, first, open, point);
    path.push_back(form);
    open = tree.forms()[form].position;
  }
  return path;
}

}  // namespace

double calibrate(const Space& space, const base::GramSet& grams, const WalkOptions& options, double seconds) {
  using Clock = std::chrono::steady_clock;
  const auto seconds_since = [](Clock::time_point then) {
    return std::chrono::duration<double>(Clock::now() - then).count();
  };
  const Tree tree(reduced(space));
  if (tree.size(0, tree.n_predictors()) == 0) return 0.0;
  const Root root(tree, grams, options.smallest_pivot_rel);
  WalkOptions quiet = options;
  quiet.progress = nullptr;
  SubtreeWalker walker(tree, root, quiet, std::numeric_limits<std::uint64_t>::max());
  const Clock::time_point start = Clock::now();
  double walked_seconds = 0.0;
  double n_inseparable = 0.0;
  std::uint64_t i = 0;
  do {
    const Path path = subtree_at(tree, spread_point(i++));
    if (!walker.enter(path)) {
      const std::size_t open = tree.forms()[path.back()].position;
      n_inseparable += static_cast<double>(tree.n_responses()) * static_cast<double>(tree.size(path.size(), open));
      continue;
    }
    const Clock::time_point entered = Clock::now();
    walker.walk();
    walked_seconds += seconds_since(entered);
  } while (seconds_since(start) < seconds && !options.stop.stop_requested());
  n_inseparable += static_cast<double>(walker.n_inseparable());
  return (static_cast<double>(walker.n_scored()) + n_inseparable) / std::max(walked_seconds, kClockResolutionSeconds);
}

}  // namespace formsieve::search

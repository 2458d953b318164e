#include "search/parts.hpp"
#include "search/saturating.hpp"
#include "search/space_walker.hpp"
#include "search/walk.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <iterator>
#include <vector>

namespace formsieve::search {

namespace {

/// Keeps the rate finite when nothing took any time.
constexpr double kClockResolutionSeconds = 1e-9;
/// Candidates of one response in a sampled subtree: a millisecond or so of work, far above the clock's resolution.
constexpr std::uint64_t kSampleSize = 100'000;

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

/// Which of several pieces of these sizes `point` of their sum falls in; `point` becomes the place within it.
std::size_t pick_at(const std::vector<double>& sizes, double& point) {
  double total = 0.0;
  for (const double size : sizes) total += size;
  double place = point * total;
  std::size_t i = 0;
  for (; i + 1 < sizes.size() && place >= sizes[i]; ++i) place -= sizes[i];
  point = sizes[i] > 0.0 ? std::min(place / sizes[i], std::nextafter(1.0, 0.0)) : 0.0;
  return i;
}

/// Goes down in the kernel until the subtree is small.
void add_lanes(const PairShape& shape, double point, std::vector<std::size_t>& lanes) {
  std::size_t open = shape.n_predictors();
  while (lanes.size() + 3 <= shape.most_picks && open > 2) {
    const std::size_t picks_left = shape.most_picks - lanes.size();
    if (shape.size(picks_left, open) <= kSampleSize) return;
    std::vector<double> sizes;
    std::vector<std::size_t> choices;
    for (std::size_t p = 2; p < open; ++p) {
      for (std::size_t lane = shape.first_lane[p]; lane < shape.first_lane[p + 1]; ++lane) {
        sizes.push_back(static_cast<double>(shape.size(picks_left - 1, p)));
        choices.push_back(lane);
      }
    }
    lanes.push_back(choices[pick_at(sizes, point)]);
    open = shape.predictor_of_lane[lanes.back()];
  }
}

/// The first small subtree on the way to the candidate that stands at `point` of the space.
Part subtree_at(const OuterTree& tree, double point) {
  Part part;
  for (;;) {
    part.with_outer = tree.size(part.outer) <= kSampleSize;
    if (part.with_outer) return part;
    std::vector<double> sizes;
    std::vector<std::size_t> choices;
    const bool is_candidate = tree.is_candidate(part.outer);
    const PairShape shape = tree.shape(tree.open_simple(part.outer), tree.most_terms() - part.outer.size());
    if (is_candidate) {
      sizes.push_back(static_cast<double>(shape.size(shape.most_picks, shape.n_predictors())));
      choices.push_back(0);
    }
    if (tree.may_pick(part.outer)) {
      for (std::size_t form = tree.first_form(tree.first_group(part.outer));
           form < tree.first_form(tree.open_groups(part.outer) - 1) ||
           form < tree.end_form(tree.open_groups(part.outer) - 1);
           ++form) {
        OuterPath child = part.outer;
        child.push_back(form);
        sizes.push_back(static_cast<double>(tree.size(child)));
        choices.push_back(form);
      }
    }
    const std::size_t i = pick_at(sizes, point);
    if (is_candidate && i == 0) {
      add_lanes(shape, point, part.lanes);
      return part;
    }
    part.outer.push_back(choices[i]);
  }
}

}  // namespace

double calibrate(const Space& space, const base::GramSet& grams, const WalkOptions& options, double seconds) {
  using Clock = std::chrono::steady_clock;
  const auto seconds_since = [](Clock::time_point then) {
    return std::chrono::duration<double>(Clock::now() - then).count();
  };
  const Space sampled = reduced(space);
  WalkOptions quiet = options;
  quiet.progress = nullptr;
  const WalkSetup setup(sampled, grams, quiet, 0, std::min(kMostResponses, space.n_responses));
  if (setup.tree.size({}) == 0) return 0.0;
  SpaceWalker walker(setup);
  const Clock::time_point start = Clock::now();
  double walked_seconds = 0.0;
  std::uint64_t i = 0;
  do {
    const Part part = subtree_at(setup.tree, spread_point(i++));
    const Clock::time_point entered = Clock::now();
    walker.walk(part, kCountless);
    walked_seconds += seconds_since(entered);
  } while (seconds_since(start) < seconds && !options.stop.stop_requested());
  const double n_done = static_cast<double>(walker.n_scored()) + static_cast<double>(walker.n_inseparable());
  return n_done / std::max(walked_seconds, kClockResolutionSeconds);
}

}  // namespace formsieve::search

#include "search/guided.hpp"

#include "base/parallel.hpp"
#include "search/guided_descent.hpp"
#include "search/guided_lists.hpp"
#include "search/guided_starts.hpp"
#include "search/guided_tally.hpp"
#include "search/own_score.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <memory>
#include <set>
#include <utility>

namespace formsieve::search {

namespace {

using By = ResponseLists::By;

/// Restarts of a round: enough for every thread of a usual machine. What a round knows is what earlier rounds found.
constexpr std::size_t kRestartsPerRound = 16;
/// Candidates of one list that a round expands: a look at all neighbours costs about a tenth of a descent.
constexpr std::size_t kExpandedPerRound = 16;
/// Terms of random starts as a multiple of those of the largest ending so far, and at least so many.
constexpr std::size_t kStartTerms = 2;
constexpr std::size_t kFewestStartTerms = 8;
/// Best endings of which one is shaken.
constexpr std::size_t kGoodEndings = 5;
/// Candidates of each list whose figures are still worked out after a stop: a usable list within seconds.
constexpr std::size_t kListedAfterStop = 256;
/// Candidates whose figures one worker works out at a time.
constexpr std::size_t kFiguresGrain = 16;

/// What one worker is asked to do.
struct Task {
  std::size_t objective = 0;
  Choices choices;
  bool independent = false;  ///< a start that owes nothing to what was found before
  std::uint64_t seed = 0;
  bool expand = false;  ///< look at all neighbours instead of going down
};

struct Done {
  std::vector<Leg> legs;
  std::unique_ptr<Scout> scout;
};

class GuidedSearch {
 public:
  GuidedSearch(const Space& space, const base::GramSet& grams, const GuidedOptions& options);

  GuidedResult run();

 private:
  void add_objective(std::size_t response, const base::GramSet::OwnUnits* own, bool comparable);
  std::vector<Task> starts();
  Task start(std::size_t index) const;
  std::vector<Task> expansions() const;
  void perform(const std::vector<Task>& tasks);
  void remember(const std::vector<Leg>& legs, bool independent);
  void take_finds(const std::vector<Done>& done);
  void report() const;
  bool stopped() const { return options_.stop.stop_requested(); }
  bool enough() const { return options_.enough && options_.enough(); }
  By by_of(std::size_t objective) const { return setup_.objectives[objective].in_own_units() ? By::own : By::cv; }
  ResponseLists& lists_of(std::size_t objective) { return lists_[setup_.objectives[objective].response()]; }
  const ResponseLists& lists_of(std::size_t objective) const { return lists_[setup_.objectives[objective].response()]; }
  std::uint64_t n_scored() const;
  GuidedResult result(bool complete) const;

  const base::GramSet& grams_;
  const GuidedOptions& options_;
  GuidedSpace space_;
  DescentSetup setup_;
  std::vector<Task> hints_;
  std::vector<ResponseLists> lists_;  ///< [response]
  Tally tally_{0};
  DistinctCount distinct_;
  std::size_t n_started_ = 0;
};

GuidedSearch::GuidedSearch(const Space& space, const base::GramSet& grams, const GuidedOptions& options)
    : grams_(grams),
      options_(options),
      space_(space),
      setup_{space_, {}, {}, options.keep, options.stop, {}, {}},
      lists_(space.n_responses, ResponseLists(options.keep)) {
  for (std::size_t r = 0; r < space.n_responses; ++r) {
    const auto* own = own_units_of(grams, r);
    const bool own_scale = std::find(options.own_scale.begin(), options.own_scale.end(), r) != options.own_scale.end();
    add_objective(r, nullptr, own == nullptr && own_scale);
    if (own != nullptr) add_objective(r, own, true);
  }
  tally_ = Tally(setup_.objectives.size());
  for (const Choice& hint : options.hints)
    for (std::size_t o = 0; o < setup_.objectives.size(); ++o)
      if (setup_.objectives[o].response() == hint.response && admits(space, hint.choice))
        hints_.push_back({o, hint.choice, false, 0, false});
}

void GuidedSearch::add_objective(std::size_t response, const base::GramSet::OwnUnits* own, bool comparable) {
  setup_.objectives.emplace_back(grams_, response, own);
  setup_.comparable.push_back(comparable);
  setup_.known.emplace_back();
  setup_.limit.push_back(lists_[response].limit(By::cv));
}

/// The start of numbered restart `index`: the objectives in turn; for each first the least candidate, then random ones
/// and shaken good endings by turns.
Task GuidedSearch::start(std::size_t index) const {
  base::SplitMix64 random = generator_of(options_.seed, index);
  const std::size_t turn = index / setup_.objectives.size();
  Task task;
  task.objective = index % setup_.objectives.size();
  const auto good = tally_.best_endings(task.objective, kGoodEndings);
  if (turn == 0) {
    task.choices = least_choice(space_.space());
  } else if (turn % 2 == 1 || good.empty()) {
    task.choices = random_start(space_, std::max(kFewestStartTerms, kStartTerms * tally_.most_terms()), random);
  } else {
    // the best one half of the time
    const std::size_t which = random.below(2) == 0 ? 0 : random.below(good.size());
    task.choices = shaken(space_, good[which], random);
  }
  task.independent = turn == 0 || turn % 2 == 1 || good.empty();
  task.seed = random.next();
  return task;
}

std::vector<Task> GuidedSearch::starts() {
  std::vector<Task> tasks;
  for (; tasks.size() < kRestartsPerRound && n_started_ < hints_.size(); ++n_started_)
    tasks.push_back(hints_[n_started_]);
  for (; tasks.size() < kRestartsPerRound; ++n_started_) tasks.push_back(start(n_started_ - hints_.size()));
  return tasks;
}

/// Leading candidates of every list whose neighbours have not been looked at.
std::vector<Task> GuidedSearch::expansions() const {
  std::vector<Task> tasks;
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o)
    for (Choices& choices : lists_of(o).unexpanded(by_of(o), options_.expand, kExpandedPerRound))
      tasks.push_back({o, std::move(choices), false, 0, true});
  return tasks;
}

/// Does the tasks in parallel and takes in what they found in their order.
void GuidedSearch::perform(const std::vector<Task>& tasks) {
  std::vector<Done> done(tasks.size());
  base::parallel_for(tasks.size(), options_.threads, [&](std::size_t i) {
    if (stopped()) return;
    done[i].scout = std::make_unique<Scout>(space_, setup_.objectives, options_.keep, setup_.limit);
    if (tasks[i].expand)
      done[i].scout->look_around(tasks[i].objective, tasks[i].choices);
    else
      done[i].legs = Descent(setup_, *done[i].scout, tasks[i].seed).run(tasks[i].objective, tasks[i].choices);
    done[i].scout->rest();
  });
  for (std::size_t i = 0; i < tasks.size(); ++i) {
    if (!done[i].scout) continue;
    distinct_.join(done[i].scout->distinct());
    if (tasks[i].expand)
      lists_of(tasks[i].objective).mark_expanded(by_of(tasks[i].objective), tasks[i].choices);
    else
      remember(done[i].legs, tasks[i].independent);
  }
  take_finds(done);
}

void GuidedSearch::remember(const std::vector<Leg>& legs, bool independent) {
  if (legs.empty() || !legs.back().ending) return;  // stopped, or without a separable start
  for (const Leg& leg : legs)
    for (const Choices& passed : leg.path) setup_.known[leg.objective].try_emplace(passed, *leg.ending);
  tally_.record(legs, independent);
}

/// Figures of the best candidates found, and the lists with them.
void GuidedSearch::take_finds(const std::vector<Done>& done) {
  const std::size_t most = stopped() ? std::min(options_.keep, kListedAfterStop) : options_.keep;
  std::set<std::pair<std::size_t, Choices>> fresh;  // response, candidate
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o) {
    std::vector<const std::vector<Found>*> finds;
    for (const Done& one : done)
      if (one.scout) finds.push_back(&one.scout->found(o));
    for (Found& found : merged(finds, most))
      if (!lists_of(o).holds(found.choices)) fresh.emplace(setup_.objectives[o].response(), std::move(found.choices));
  }
  const std::vector<std::pair<std::size_t, Choices>> all(fresh.begin(), fresh.end());
  std::vector<Figures> figures(all.size());
  base::parallel_for((all.size() + kFiguresGrain - 1) / kFiguresGrain, options_.threads, [&](std::size_t part) {
    for (std::size_t i = part * kFiguresGrain; i < std::min((part + 1) * kFiguresGrain, all.size()); ++i)
      figures[i] = figures_of(space_, grams_, all[i].first, all[i].second);
  });
  for (std::size_t i = 0; i < all.size(); ++i) lists_[all[i].first].add(all[i].second, figures[i]);
  for (ResponseLists& lists : lists_) lists.settle();
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o) setup_.limit[o] = lists_of(o).limit(by_of(o));
}

std::uint64_t GuidedSearch::n_scored() const {
  const BigCount all = count(space_.space());
  const auto estimate = static_cast<std::uint64_t>(std::llround(distinct_.estimate()));
  return all < estimate ? all.convert_to<std::uint64_t>() : estimate;
}

void GuidedSearch::report() const {
  if (!options_.progress) return;
  GuidedProgress progress{n_started_, n_scored(), 0};
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o)
    progress.n_unexpanded += lists_of(o).n_unexpanded(by_of(o), options_.expand);
  options_.progress(progress);
}

GuidedResult GuidedSearch::result(bool complete) const {
  GuidedResult result;
  result.by_cv.resize(space_.space().n_responses);
  result.by_own.resize(space_.space().n_responses);
  double least = std::numeric_limits<double>::infinity();
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o) {
    const std::size_t response = setup_.objectives[o].response();
    GuidedList& list = (by_of(o) == By::own ? result.by_own : result.by_cv)[response];
    list = lists_of(o).list(by_of(o), space_, response);
    list.n_starts = tally_.n_starts(o);
    if (list.candidates.empty()) continue;
    list.n_found_best = tally_.n_ended(o, list.candidates.front().choice.choice);
    if (!setup_.comparable[o] || !(list.sse.front() < least)) continue;
    least = list.sse.front();
    result.best_response = response;
  }
  result.n_restarts = n_started_;
  result.n_scored = n_scored();
  result.complete = complete;
  return result;
}

GuidedResult GuidedSearch::run() {
  if (!space_.any()) return result(true);
  const std::size_t n_asked = options_.restarts + hints_.size();
  // one round is done even where there is no time for it, so that there is a list
  for (bool first = true; n_started_ < n_asked && !stopped() && (first || !enough()); first = false) {
    perform(starts());
    if (!stopped()) perform(expansions());
    report();
  }
  if (n_started_ < n_asked) return result(false);
  for (std::vector<Task> tasks = expansions(); !tasks.empty(); tasks = expansions()) {
    if (stopped() || enough()) return result(false);
    perform(tasks);
    report();
  }
  return result(!stopped());
}

}  // namespace

GuidedResult guided(const Space& space, const base::GramSet& grams, const GuidedOptions& options) {
  assert(space.n_responses == grams.n_responses);
  return GuidedSearch(space, grams, options).run();
}

}  // namespace formsieve::search

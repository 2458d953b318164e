#include "pipeline/proving.hpp"

#include "base/parallel.hpp"
#include "pipeline/penalties.hpp"
#include "pipeline/profile.hpp"
#include "proof/warm_start.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <limits>
#include <numbers>

namespace formsieve::pipeline {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// The best list of a proof is at least so long: its last score is what the near-best set and the profile start from.
constexpr std::size_t kFewestListed = 100;

/// Candidates that the near-best set keeps: enough for shares of forms to a per cent, few enough to score within a
/// second. A larger set is said to hold at least so many.
constexpr std::size_t kMostNear = 20'000;

/// Shares of the time: for the best, for the near-best set, and the rest for the profile. Time that one leaves goes to
/// those after it.
constexpr double kShareOfBest = 0.5;
constexpr double kShareOfNear = 0.3;  // of what is left then

/// The profile takes at most so long, or so many times as long as what came before it: its hardest choices could take
/// hours that nobody asked for. What is open then is said.
constexpr double kProfileSeconds = 30.0;
constexpr double kProfileShare = 4.0;

/// In the first round a forced choice may take this share of its part of the time, so that something is known of each
/// before any takes long; what is still open then is gone on with in a second round.
constexpr double kFirstRound = 0.4;

/// Leading candidates that a forced choice begins from.
constexpr std::size_t kHints = 12;

/// Numbers of terms beyond the largest of the near-best set that are still proved, so that the loss is seen to rise.
constexpr std::size_t kTermsBeyond = 3;

using Clock = std::chrono::steady_clock;

/// The problem of the proof, over the response forms that have a likelihood.
struct Stage {
  std::vector<std::size_t> responses;  ///< of the search
  search::Space space;
  base::GramSet grams;
  proof::Problem problem;
};

/// Rows and columns of the responses that take part, beside all design columns.
base::GramSet gram_of(const base::GramSet& whole, const std::vector<std::size_t>& responses) {
  base::GramSet part;
  part.n_rows = whole.n_rows;
  part.n_columns = whole.n_columns;
  part.n_responses = responses.size();
  std::vector<std::size_t> from(whole.n_columns);
  for (std::size_t c = 0; c < whole.n_columns; ++c) from[c] = c;
  for (const std::size_t r : responses) from.push_back(whole.n_columns + r);
  part.all.resize(from.size() * from.size());
  for (std::size_t j = 0; j < from.size(); ++j)
    for (std::size_t i = 0; i < from.size(); ++i)
      part.all[j * from.size() + i] = whole.all[from[j] * whole.order() + from[i]];
  for (const std::size_t r : responses) part.response_scale.push_back(whole.response_scale[r]);
  return part;
}

/// What the criterion adds to n ln(RSS) + penalty[k], the RSS standardised (design.md, "Own-scale likelihood").
double constant_of(const Prepared& prepared, const base::GramSet& grams, const LikelihoodConstants& constants,
                   std::size_t response) {
  const double n = static_cast<double>(prepared.data.n_rows);
  return n * (std::log(2.0 * std::numbers::pi) + 1.0 - std::log(n) + 2.0 * std::log(grams.response_scale[response])) -
         2.0 * (constants.half_log_weights + constants.log_jacobian[response]);
}

std::unique_ptr<Stage> make_stage(const Prepared& prepared, judge::Criterion criterion, const base::GramSet& grams,
                                  const LikelihoodConstants& constants) {
  auto stage = std::make_unique<Stage>();
  for (std::size_t r = 0; r < grams.n_responses; ++r)
    if (std::isfinite(constants.log_jacobian[r])) stage->responses.push_back(r);
  stage->space = prepared.space;
  stage->space.n_responses = stage->responses.size();
  stage->grams = gram_of(grams, stage->responses);
  stage->problem.space = &stage->space;
  stage->problem.grams = &stage->grams;
  stage->problem.penalty = penalties(prepared, criterion);
  for (const std::size_t r : stage->responses)
    stage->problem.constant.push_back(constant_of(prepared, grams, constants, r));
  return stage;
}

/// One proof of the profile.
struct Task {
  proof::Restriction restriction;
  std::vector<search::Choice> hints;
  Forced* result = nullptr;
  std::uint64_t nodes = 0;
};

class Prover {
 public:
  Prover(const Prepared& prepared, const run::Plan& plan, const Stage& stage, const ProvingLimits& limits)
      : prepared_(prepared),
        plan_(plan),
        stage_(stage),
        limits_(limits),
        root_(stage.problem),
        start_(Clock::now()),
        end_(limits.seconds) {}

  void prove_best(Proved& proved, std::vector<search::Choice> hints);
  void prove_near(Proved& proved);
  void prove_profile(Proved& proved);

 private:
  double seconds() const { return std::chrono::duration<double>(Clock::now() - start_).count(); }
  double seconds_left() const { return end_ - seconds(); }
  std::function<bool()> until(double end) const {
    return [this, end] { return seconds() >= end; };
  }
  std::function<void(const proof::Progress&)> news(const std::string& phase) const;
  proof::Proof run(proof::Restriction restriction, proof::Limits limits,
                   const std::vector<search::Choice>& hints) const;
  void run(Task& task, double most_seconds, const proof::WarmStart& start) const;
  void run_open(std::vector<Task>& tasks, double share, const proof::WarmStart& start) const;
  std::vector<Task> choice_tasks(Proved& proved) const;
  std::vector<Task> terms_tasks(Proved& proved) const;
  std::vector<Task> response_tasks(Proved& proved) const;
  template <class Belongs>
  bool settle(const Proved& proved, Forced& forced, Belongs belongs) const;
  std::vector<search::Choice> forced_hints(const Proved& proved, std::size_t predictor, std::uint16_t choice) const;

  const Prepared& prepared_;
  const run::Plan& plan_;
  const Stage& stage_;
  const ProvingLimits& limits_;
  proof::RootGram root_;
  Clock::time_point start_;
  double end_;  ///< seconds from the start
};

/// Counts nodes, and names the gap as it closes.
std::function<void(const proof::Progress&)> Prover::news(const std::string& phase) const {
  return [this, phase, said = std::uint64_t{0}](const proof::Progress& progress) mutable {
    const double gap = progress.best_score - progress.lower_bound;
    char text[32];
    std::snprintf(text, sizeof text, ", gap %.1f", std::max(0.0, gap));
    if (std::isfinite(gap)) limits_.rename(phase + text);
    limits_.progress(progress.nodes - said);
    said = progress.nodes;
  };
}

proof::Proof Prover::run(proof::Restriction restriction, proof::Limits limits,
                         const std::vector<search::Choice>& hints) const {
  limits.stop = limits_.stop;
  return proof::prove(root_, restriction, limits, hints);
}

void Prover::prove_best(Proved& proved, std::vector<search::Choice> hints) {
  limits_.begin("proving", 0.0, "nodes");
  proof::Limits limits;
  limits.progress = news("proving");
  limits.keep = std::max(kFewestListed, plan_.rank.shortlist);
  limits.enough = until(kShareOfBest * limits_.seconds);
  limits.threads = limits_.threads;
  proved.best = run({}, limits, hints);
  proved.nodes += proved.best.nodes;
}

void Prover::prove_near(Proved& proved) {
  std::vector<search::Choice> hints;
  for (const auto& listed : proved.best.best) hints.push_back(listed.choice);
  limits_.begin("near-best set", 0.0, "nodes");
  proof::Limits limits;
  limits.progress = news("near-best set");
  limits.keep = std::max(kMostNear, plan_.search.pool);
  limits.within = plan_.search.within;
  limits.enough = until(seconds() + kShareOfNear * std::max(0.0, seconds_left()));
  limits.threads = limits_.threads;
  proved.near = run({}, limits, hints);
  proved.nodes += proved.near.nodes;
}

/// Answers from the lists alone where they can: what they hold is the best of its kind once they are proved.
template <class Belongs>
bool Prover::settle(const Proved& proved, Forced& forced, Belongs belongs) const {
  for (const proof::Proof* list : {&proved.best, &proved.near}) {
    const auto found = std::find_if(list->best.begin(), list->best.end(),
                                    [&](const proof::Listed& listed) { return belongs(listed.choice); });
    if (found != list->best.end() && (!forced.best || found->score < forced.best->score)) forced.best = *found;
    forced.lower_bound = std::max(forced.lower_bound, list->lower_bound);
  }
  if (!forced.best) return false;
  forced.lower_bound = std::min(forced.lower_bound, forced.best->score);
  forced.proved = forced.lower_bound >= forced.best->score;
  return forced.proved;
}

/// The leading candidates, changed so that they have the choice.
std::vector<search::Choice> Prover::forced_hints(const Proved& proved, std::size_t predictor,
                                                 std::uint16_t choice) const {
  std::vector<search::Choice> hints;
  for (std::size_t i = 0; i < std::min(kHints, proved.best.best.size()); ++i) {
    search::Choice hint = proved.best.best[i].choice;
    hint.choice[predictor] = choice;
    if (search::n_terms(hint.choice) <= stage_.space.max_terms.value_or(hint.choice.size()))
      hints.push_back(std::move(hint));
  }
  return hints;
}

std::vector<Task> Prover::choice_tasks(Proved& proved) const {
  std::vector<Task> tasks;
  proved.of_choice.resize(stage_.space.predictors.size());
  for (std::size_t j = 0; j < stage_.space.predictors.size(); ++j) {
    const auto& predictor = stage_.space.predictors[j];
    proved.of_choice[j].assign(1 + predictor.forms.size(), {{}, -kInfinity, false});
    for (std::uint16_t c = predictor.always ? 1 : 0; c <= predictor.forms.size(); ++c) {
      Forced& forced = proved.of_choice[j][c];
      if (settle(proved, forced, [&](const search::Choice& choice) { return choice.choice[j] == c; })) continue;
      Task task{{}, forced_hints(proved, j, c), &forced};
      task.restriction.actions.push_back({j, proof::Actions{1} << c});
      tasks.push_back(std::move(task));
    }
  }
  // what leaving out costs is asked for first
  std::stable_partition(tasks.begin(), tasks.end(),
                        [](const Task& task) { return task.restriction.actions.front().second == 1; });
  return tasks;
}

std::vector<Task> Prover::terms_tasks(Proved& proved) const {
  std::size_t most = 0, fewest = 0;
  for (const auto& listed : proved.near.best) most = std::max(most, search::n_terms(listed.choice.choice));
  for (const auto& predictor : stage_.space.predictors) fewest += predictor.always ? 1 : 0;
  most = std::min({most + kTermsBeyond, stage_.space.predictors.size(),
                   stage_.space.max_terms.value_or(stage_.space.predictors.size())});
  std::vector<Task> tasks;
  proved.by_terms.assign(most + 1, {{}, -kInfinity, false});
  for (std::size_t k = fewest; k <= most; ++k) {
    if (settle(proved, proved.by_terms[k],
               [&](const search::Choice& choice) { return search::n_terms(choice.choice) == k; }))
      continue;
    Task task{{}, {}, &proved.by_terms[k]};
    task.restriction.fewest_terms = task.restriction.most_terms = k;
    tasks.push_back(std::move(task));
  }
  return tasks;
}

std::vector<Task> Prover::response_tasks(Proved& proved) const {
  std::vector<Task> tasks;
  proved.by_response.assign(stage_.responses.size(), {{}, -kInfinity, false});
  for (std::size_t r = 0; r < stage_.responses.size(); ++r) {
    if (settle(proved, proved.by_response[r], [&](const search::Choice& choice) { return choice.response == r; }))
      continue;
    Task task{{}, {}, &proved.by_response[r]};
    task.restriction.response = r;
    for (std::size_t i = 0; i < std::min(kHints, proved.best.best.size()); ++i) {
      task.hints.push_back(proved.best.best[i].choice);
      task.hints.back().response = r;
    }
    tasks.push_back(std::move(task));
  }
  return tasks;
}

void Prover::run(Task& task, double most_seconds, const proof::WarmStart& start) const {
  if (most_seconds <= 0.0 || limits_.stop.stop_requested()) return;
  proof::Limits limits;
  limits.keep = 1;
  limits.start = &start;
  limits.threads = 1;
  limits.enough = until(seconds() + most_seconds);
  const proof::Proof one = run(task.restriction, limits, task.hints);
  Forced& forced = *task.result;
  if (!one.best.empty() && (!forced.best || one.best.front().score < forced.best->score))
    forced.best = one.best.front();
  forced.lower_bound = std::max(forced.lower_bound, one.lower_bound);
  if (forced.best) forced.lower_bound = std::min(forced.lower_bound, forced.best->score);
  forced.proved = one.proved;
  task.nodes += one.nodes;
}

/// Runs the tasks that are still open side by side, each on one thread for at most its part of a share of the time.
void Prover::run_open(std::vector<Task>& tasks, double share, const proof::WarmStart& start) const {
  std::vector<Task*> open;
  for (Task& task : tasks)
    if (!task.result->proved) open.push_back(&task);
  if (open.empty()) return;
  limits_.begin("proving what each choice costs", static_cast<double>(open.size()), "choices");
  const double threads = limits_.threads == 0 ? base::available_threads() : limits_.threads;
  const double each = share * std::max(0.0, seconds_left()) * threads / static_cast<double>(open.size());
  base::parallel_for(open.size(), limits_.threads, [&](std::size_t i) {
    run(*open[i], std::min(each, seconds_left()), start);
    limits_.progress(1);
  });
}

void Prover::prove_profile(Proved& proved) {
  std::vector<Task> tasks = response_tasks(proved);
  for (auto& task : terms_tasks(proved)) tasks.push_back(std::move(task));
  for (auto& task : choice_tasks(proved)) tasks.push_back(std::move(task));
  end_ = std::min(end_, seconds() + std::max(kProfileSeconds, kProfileShare * seconds()));
  const bool all_settled =
      std::all_of(tasks.begin(), tasks.end(), [](const Task& task) { return task.result->proved; });
  if (all_settled || seconds_left() <= 0.0 || limits_.stop.stop_requested()) return;
  const proof::WarmStart start = proof::warm_start(root_, {}, limits_.threads);
  run_open(tasks, kFirstRound, start);
  run_open(tasks, 1.0, start);
  for (const Task& task : tasks) proved.nodes += task.nodes;
}

/// Back to the response forms of the search.
void rename(Proved& proved, const std::vector<std::size_t>& responses, std::size_t n_responses) {
  for (proof::Proof* list : {&proved.best, &proved.near})
    for (auto& listed : list->best) listed.choice.response = responses[listed.choice.response];
  const auto each = [&](Forced& forced) {
    if (forced.best) forced.best->choice.response = responses[forced.best->choice.response];
  };
  for (auto& choices : proved.of_choice) std::for_each(choices.begin(), choices.end(), each);
  std::for_each(proved.by_terms.begin(), proved.by_terms.end(), each);
  std::for_each(proved.by_response.begin(), proved.by_response.end(), each);
  std::vector<Forced> by_response(n_responses, Forced{{}, -kInfinity, false});
  for (std::size_t i = 0; i < proved.by_response.size(); ++i) by_response[responses[i]] = proved.by_response[i];
  proved.by_response = std::move(by_response);
  for (std::size_t r = 0; r < n_responses; ++r)
    if (std::find(responses.begin(), responses.end(), r) == responses.end()) proved.without_density.push_back(r);
}

std::vector<search::Choice> hints_for(const std::vector<search::Choice>& hints,
                                      const std::vector<std::size_t>& responses) {
  std::vector<search::Choice> result;
  for (search::Choice hint : hints) {
    const auto at = std::find(responses.begin(), responses.end(), hint.response);
    if (at == responses.end()) continue;
    hint.response = static_cast<std::size_t>(at - responses.begin());
    result.push_back(std::move(hint));
  }
  return result;
}

}  // namespace

Proved prove_space(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                   const LikelihoodConstants& constants, const ProvingLimits& limits,
                   std::vector<search::Choice> hints) {
  Proved proved;
  proved.criterion = summary_criterion(criterion_of(plan.rank.by));
  const auto stage = make_stage(prepared, proved.criterion, grams, constants);
  if (stage->responses.empty()) {
    rename(proved, {}, grams.n_responses);
    return proved;
  }
  Prover prover(prepared, plan, *stage, limits);
  prover.prove_best(proved, hints_for(hints, stage->responses));
  prover.prove_near(proved);
  prover.prove_profile(proved);
  rename(proved, stage->responses, grams.n_responses);
  return proved;
}

std::vector<std::vector<search::Choice>> lowest_by_response(const Proved& proved, std::size_t most) {
  std::vector<std::vector<search::Choice>> lowest(proved.by_response.size());
  const auto& listed = proved.near.best.size() > proved.best.best.size() ? proved.near.best : proved.best.best;
  for (const proof::Listed& one : listed)
    if (lowest[one.choice.response].size() < most) lowest[one.choice.response].push_back(one.choice);
  for (std::size_t r = 0; r < lowest.size(); ++r)
    if (lowest[r].empty() && proved.by_response[r].best) lowest[r].push_back(proved.by_response[r].best->choice);
  return lowest;
}

}  // namespace formsieve::pipeline

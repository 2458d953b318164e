#include <formsieve/pipeline.hpp>

#include "base/memory.hpp"
#include "base/parallel.hpp"
#include "checks/checks.hpp"
#include "judge/judge.hpp"
#include "pipeline/beyond.hpp"
#include "pipeline/bounding.hpp"
#include "pipeline/estimate.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/guarded.hpp"
#include "pipeline/inseparable.hpp"
#include "pipeline/listing.hpp"
#include "pipeline/memory.hpp"
#include "pipeline/meter.hpp"
#include "pipeline/outputs.hpp"
#include "pipeline/penalties.hpp"
#include "pipeline/pilot.hpp"
#include "pipeline/pool.hpp"
#include "pipeline/prepare.hpp"
#include "pipeline/profile.hpp"
#include "pipeline/proof_report.hpp"
#include "pipeline/proving.hpp"
#include "pipeline/strategy.hpp"
#include "search/guided.hpp"
#include "search/walk.hpp"

#include <spdlog/spdlog.h>

#include <algorithm>

namespace formsieve::pipeline {

namespace {

/// Candidates examined between two looks at the wish to stop.
constexpr std::size_t kExamineChunk = 64;

/// Pooled candidates that are still examined after a stop, best of every list first, so that what was scored leaves a
/// usable shortlist within seconds.
constexpr std::size_t kExamineAfterStop = 256;

/// Shares of the budget that are kept back for the examination and for what estimates leave out: at least and at most,
/// since estimates for many predictors are far too cautious.
constexpr double kLeastReserve = 0.02;
constexpr double kMostReserve = 0.15;

/// Share of the budget that the proof may take where a guided search follows.
constexpr double kShareOfProof = 0.6;

/// Leading candidates of the proof that the guided search starts from.
constexpr std::size_t kGuidedHints = 25;

/// Share of the budget that the bounded walk may take: it makes certain what the guided search has found already, which
/// is worth a minute or two of the default budget of eight hours, not a night.
constexpr double kShareOfBoundedWalk = 1.0 / 300.0;

/// The steps of one search, in order, each reading what the steps before it left.
class Search {
 public:
  Search(const run::Plan& plan, const SearchOptions& options, std::stop_token stop)
      : plan_(plan), options_(options), meter_(options.progress, plan.search.budget_seconds, std::move(stop)) {}

  Result<SearchOutcome> run();

 private:
  Status check_plan() const;
  Status read_and_prepare();
  Status open_outputs();
  Status count_and_announce();
  Status screen();
  void visit_every();
  void prove();
  void guide();
  void visit_bounded();
  Beyond beyond() const;
  void examine();
  Status rank_and_complete();
  void describe();
  void describe_walk();
  void describe_beyond();
  model::ModelSet models() const;
  Result<SearchOutcome> write();

  search::WalkOptions walk_options() const;

  const run::Plan& plan_;
  const SearchOptions& options_;
  Meter meter_;
  std::optional<Prepared> prepared_;
  std::optional<Examiner> examiner_;
  std::unique_ptr<Outputs> outputs_;
  base::GramSet grams_;
  std::vector<search::PoolRule> rules_;
  Strategy strategy_;
  std::optional<Proved> proved_;
  std::optional<search::GuidedResult> guided_;
  Bounded bounded_;
  double candidates_per_second_ = 1.0;
  double reserved_seconds_ = 0.0;  ///< for what follows the search itself
  search::WalkResult walked_;
  std::vector<PoolList> lists_;
  std::vector<search::Scored> pool_;
  ChoiceByNumber choice_by_number_;
  std::vector<judge::Candidate> candidates_;
  judge::Shortlist shortlist_;
  bool examined_all_ = true;
};

std::string kind_words(design::FoldKind kind) {
  switch (kind) {
    case design::FoldKind::grouped:
      return "grouped";
    case design::FoldKind::ordered:
      return "ordered";
    case design::FoldKind::given:
      return "given";
    case design::FoldKind::shuffled:
      break;
  }
  return "shuffled";
}

Status Search::check_plan() const {
  const auto known = checks::names();
  for (const auto& name : plan_.rank.require) {
    if (std::find(known.begin(), known.end(), name) != known.end()) continue;
    std::string list;
    for (const auto& check : known) list += (list.empty() ? "" : ", ") + check;
    const auto near = run::nearest(name, known);
    return Error{ErrorKind::plan, "'rank.require' names the check '" + name + "', which does not exist",
                 where_in_plan(plan_, "rank.require"),
                 near ? "did you mean '" + *near + "'?" : "the checks are " + list};
  }
  return {};
}

Status Search::read_and_prepare() {
  meter_.begin("reading", 0.0, "rows");
  auto table = load_table(plan_, options_.threads);
  if (!table) return table.error();
  auto prepared = prepare(std::move(*table), plan_);
  if (!prepared) return prepared.error();
  prepared_.emplace(std::move(*prepared));
  return check_memory(*prepared_, plan_, options_.threads, base::available_memory());
}

Status Search::open_outputs() {
  auto outputs = Outputs::open(folder_name(plan_, options_.out), options_.replace);
  if (!outputs) return outputs.error();
  outputs_ = std::move(*outputs);
  outputs_->log().info("formsieve {}, table {} (sha256 {})", version(), prepared_->summary.file,
                       prepared_->summary.sha256);
  outputs_->log().info("{} rows read, {} in use; {} predictors", prepared_->summary.rows_read,
                       prepared_->summary.rows_used, prepared_->data.predictors.size());
  for (const auto& note : prepared_->notes) outputs_->log().info("{}", note);
  return outputs_->write_inputs(*prepared_, plan_);
}

search::WalkOptions Search::walk_options() const {
  search::WalkOptions options;
  options.rules = rules_;
  options.summary_penalty = penalties(*prepared_, criterion_of(plan_.rank.by));
  options.threads = options_.threads;
  return options;
}

Status Search::count_and_announce() {
  meter_.begin("building Gram matrices", 0.0, "rows");
  const double gram_start = meter_.seconds();
  auto grams = design::build_grams(prepared_->data, prepared_->folds, options_.threads);
  if (!grams) return grams.error();
  const double gram_seconds = meter_.seconds() - gram_start;
  grams_ = std::move(*grams);
  rules_ = pool_rules(*prepared_, plan_);
  examiner_.emplace(*prepared_);
  const Estimate time = estimate(*prepared_, grams_, walk_options(), *examiner_, plan_.search.pool, gram_seconds);
  auto strategy = choose_strategy(time, *prepared_, plan_);
  if (!strategy) return strategy.error();
  strategy_ = std::move(*strategy);
  candidates_per_second_ = time.candidates_per_second;
  reserved_seconds_ =
      std::min(time.examine_seconds + time.own_units_seconds + kLeastReserve * plan_.search.budget_seconds,
               kMostReserve * plan_.search.budget_seconds);

  Announcement news;
  news.candidates = time.candidates.str();
  news.n_responses = prepared_->data.response_forms.size();
  news.n_predictors = prepared_->data.predictors.size();
  for (const auto& menu : prepared_->menus) news.n_forms += menu.forms.size();
  news.rows_read = prepared_->summary.rows_read;
  news.rows_used = prepared_->summary.rows_used;
  news.folds = prepared_->folds.count;
  news.repeats = prepared_->folds.repeats;
  news.seconds_estimate = strategy_.every ? time.total() : -1.0;
  news.strategy = strategy_.why;
  news.notes = prepared_->notes;
  outputs_->log().info("{} candidates; estimated time {} at {:.3g} candidates a second", grouped(time.candidates),
                       duration_words(time.total()), time.candidates_per_second);
  outputs_->log().info("strategy {}: {}", strategy_.name, strategy_.why);
  shortlist_.space.candidates = news.candidates;
  if (options_.announce) options_.announce(news);
  return {};
}

void Search::visit_every() {
  meter_.begin("screening", search::BigCount(shortlist_.space.candidates).convert_to<double>(), "candidates");
  search::WalkOptions options = walk_options();
  options.stop = meter_.token();
  options.progress = [this](std::uint64_t scored) { meter_.add(scored); };
  const double start = meter_.seconds();
  walked_ = search::walk(prepared_->space, grams_, options);
  const double seconds = meter_.seconds() - start;
  meter_.end();
  outputs_->log().info("screened {} candidates in {:.2f} s, {} inseparable", walked_.n_scored, seconds,
                       walked_.n_inseparable.str());
}

void Search::prove() {
  ProvingLimits limits;
  const double left = plan_.search.budget_seconds - meter_.seconds() - reserved_seconds_;
  limits.seconds = std::max(0.0, left) * (strategy_.guides ? kShareOfProof : 1.0);
  limits.threads = options_.threads;
  limits.stop = meter_.token();
  limits.begin = [this](const std::string& phase, double total, const std::string& unit) {
    meter_.begin(phase, total, unit);
  };
  limits.rename = [this](const std::string& phase) { meter_.rename(phase); };
  limits.progress = [this](std::uint64_t units) { meter_.add(units); };
  const double start = meter_.seconds();
  proved_ = prove_space(*prepared_, plan_, grams_, examiner_->likelihood_constants(), limits);
  meter_.end();
  outputs_->log().info("proof: {} nodes in {:.2f} s, {}, {} candidates within {}", proved_->nodes,
                       meter_.seconds() - start, proved_->best.proved ? "proved" : "open", proved_->near.best.size(),
                       plan_.search.within);
}

void Search::guide() {
  search::GuidedOptions options;
  options.keep = list_length(*prepared_, plan_.search.pool);
  options.seed = plan_.search.seed;
  options.threads = options_.threads;
  options.stop = meter_.token();
  const double until = plan_.search.budget_seconds - reserved_seconds_;
  options.enough = [this, until] { return meter_.seconds() > until; };
  if (proved_)
    for (std::size_t i = 0; i < std::min(kGuidedHints, proved_->best.best.size()); ++i)
      options.hints.push_back(proved_->best.best[i].choice);
  for (std::size_t r = 0; r < prepared_->data.response_forms.size(); ++r)
    if (is_linear(prepared_->data.response_forms[r])) options.own_scale.push_back(r);
  meter_.begin("guided search", static_cast<double>(options.restarts), "starts");
  std::size_t said = 0;
  options.progress = [this, &said](const search::GuidedProgress& progress) {
    meter_.add(progress.n_restarts - said);
    said = progress.n_restarts;
  };
  const double start = meter_.seconds();
  guided_ = search::guided(prepared_->space, grams_, options);
  meter_.end();
  outputs_->log().info("guided search: {} starts, {} candidates in {:.2f} s", guided_->n_restarts, guided_->n_scored,
                       meter_.seconds() - start);
}

void Search::visit_bounded() {
  BoundingLimits limits;
  limits.keep = plan_.search.pool;
  limits.seconds = std::min(plan_.search.budget_seconds * kShareOfBoundedWalk,
                            plan_.search.budget_seconds - reserved_seconds_ - meter_.seconds());
  limits.candidates_per_second = candidates_per_second_;
  limits.threads = options_.threads;
  std::vector<search::Choice> hints;
  for (const auto& list : guided_->by_cv)
    for (const auto& scored : list.candidates) hints.push_back(scored.choice);
  const double start = meter_.seconds();
  bounded_ = bound_and_walk(*prepared_, grams_, limits, hints, meter_);
  if (!bounded_.words.empty())
    outputs_->log().info("bounded walk in {:.2f} s: {}", meter_.seconds() - start, bounded_.words);
}

Beyond Search::beyond() const {
  return {proved_ ? &*proved_ : nullptr, guided_ ? &*guided_ : nullptr, bounded_.walk ? &*bounded_.walk : nullptr};
}

Status Search::screen() {
  if (strategy_.proves) prove();
  meter_.begin("building Gram matrices in own units", 0.0, "rows");
  const auto pilots =
      proved_ ? lowest_by_response(*proved_, kPilotCandidates) : std::vector<std::vector<search::Choice>>();
  if (auto status = add_own_units(*prepared_, grams_, options_.threads, pilots); !status) return status.error();
  if (strategy_.every) visit_every();
  if (strategy_.guides) guide();
  if (strategy_.bounds) visit_bounded();
  if (!strategy_.every) walked_ = beyond_lists(*prepared_, plan_, grams_, beyond(), options_.threads);
  lists_ = pool_lists(*prepared_, plan_, grams_, walked_, options_.threads);
  pool_ = unite(lists_, plan_.search.pool);
  outputs_->log().info("{} candidates pooled", pool_.size());
  return {};
}

void Search::examine() {
  const bool stopped_before = meter_.stopped();
  const std::size_t most = stopped_before ? std::min(pool_.size(), kExamineAfterStop) : pool_.size();
  meter_.begin("examining", static_cast<double>(most), "candidates");
  std::size_t examined = 0;
  while (examined < most && !(examined > 0 && !stopped_before && meter_.stopped())) {
    const std::size_t count = std::min(kExamineChunk, most - examined);
    std::vector<Examined> results(count);
    base::parallel_for(count, options_.threads, [&](std::size_t i) {
      results[i] = examiner_->score(pool_[examined + i].choice, pool_[examined + i].number);
      meter_.add(1);
    });
    for (auto& result : results) {
      if (result.contradicts_direction) {
        ++shortlist_.space.set_aside_direction;
      } else if (result.candidate) {
        choice_by_number_.emplace(result.candidate->number, result.choice);
        candidates_.push_back(std::move(*result.candidate));
      } else {
        outputs_->log().warn("a pooled candidate could not be fitted: {}", result.failure);
      }
    }
    examined += count;
  }
  meter_.end();
  examined_all_ = examined == pool_.size();
  shortlist_.space.pooled = pool_.size();
  shortlist_.space.examined = examined;
}

Status Search::rank_and_complete() {
  shortlist_.criterion = criterion_of(plan_.rank.by);
  shortlist_.near_tie = plan_.rank.near_tie;
  ListingWatch watch;
  watch.begin = [this](const std::string& phase, double total, const std::string& unit) {
    meter_.begin(phase, total, unit);
  };
  watch.done = [this](std::uint64_t units) { meter_.add(units); };
  meter_.begin("ranking", 0.0, "");
  auto listing = list_candidates(*prepared_, *examiner_, plan_, std::move(candidates_), choice_by_number_,
                                 options_.threads, watch);
  meter_.end();
  if (!listing) return listing.error();
  shortlist_.candidates = std::move(listing->candidates);
  shortlist_.remarks = std::move(listing->remarks);
  shortlist_.space.set_aside_require = listing->n_set_aside;
  shortlist_.space.family_rule = listing->family_rule;
  return {};
}

void Search::describe_walk() {
  auto& space = shortlist_.space;
  shortlist_.summary = space_summary(walked_, *prepared_, shortlist_.criterion, examiner_->likelihood_constants());
  space.complete = walked_.complete && examined_all_;
  space.proved = walked_.complete;
  space.pool_formed = pool_words(*prepared_, plan_, grams_, walked_, pool_.size());
  space.pool_margin = margin_words(*prepared_, lists_, walked_, pool_);
}

void Search::describe_beyond() {
  auto& space = shortlist_.space;
  space.complete = examined_all_ && !meter_.stopped();
  space.proved = false;
  if (proved_) {
    shortlist_.proof = proof_report(*proved_, *prepared_, plan_.search.within);
    space.proved = shortlist_.proof.proved;
    space.gap = shortlist_.proof.gap;
  }
  space.pool_formed = beyond_pool_words(plan_, beyond(), pool_);
  if (guided_) shortlist_.remarks.push_back(guided_words(*guided_));
  if (!bounded_.words.empty()) shortlist_.remarks.push_back(bounded_.words);
}

void Search::describe() {
  shortlist_.formsieve = version();
  shortlist_.data = prepared_->summary;
  shortlist_.folds = {prepared_->folds.count, prepared_->folds.repeats, prepared_->folds.seed,
                      kind_words(prepared_->folds.kind)};
  shortlist_.responses = prepared_->data.response_forms;
  shortlist_.response_notes = prepared_->response_notes;
  shortlist_.menus = prepared_->menus;
  auto& space = shortlist_.space;
  space.scored = std::to_string(walked_.n_scored);
  space.inseparable = walked_.n_inseparable.str();
  space.strategy = strategy_.name;
  space.strategy_why = strategy_.why;
  if (strategy_.every)
    describe_walk();
  else
    describe_beyond();
  space.seconds = meter_.seconds();
  for (auto& words : inseparable_words(*prepared_, grams_, walked_, search::kSmallestPivot_rel))
    shortlist_.remarks.push_back(std::move(words));
  shortlist_.remarks.insert(shortlist_.remarks.begin(), prepared_->notes.begin(), prepared_->notes.end());
  if (!space.complete && strategy_.every)
    shortlist_.remarks.insert(shortlist_.remarks.begin(),
                              "the search was stopped early: " + grouped(walked_.n_scored) + " of " +
                                  grouped(search::BigCount(space.candidates)) +
                                  " candidates were scored; better ones may be among the others");
  shortlist_.cautions = judge::general_cautions(shortlist_);
}

/// What scores new rows by each of the listed candidates.
model::ModelSet Search::models() const {
  const auto& listed = shortlist_.candidates;
  std::vector<std::optional<Result<model::Model>>> models(listed.size());
  base::parallel_for(listed.size(), options_.threads, [&](std::size_t i) {
    models[i].emplace(examiner_->model(choice_by_number_.at(listed[i].number), listed[i]));
  });
  model::ModelSet set{version(), prepared_->summary.response, prepared_->summary.weight, {}};
  for (auto& model : models) {
    if (*model)
      set.models.push_back(*std::move(*model));
    else
      outputs_->log().warn("a listed candidate cannot score new rows: {}", model->error().message);
  }
  return set;
}

Result<SearchOutcome> Search::write() {
  if (auto status = outputs_->write_models(models()); !status) return status.error();
  if (auto status = outputs_->write_shortlist(shortlist_); !status) return status.error();
  outputs_->log().info("{} in {:.2f} s", shortlist_.space.complete ? "finished" : "stopped early", meter_.seconds());
  SearchOutcome outcome;
  outcome.run_folder = outputs_->path();
  outcome.stopped_early = !shortlist_.space.complete;
  outcome.shortlist = std::move(shortlist_);
  return outcome;
}

Result<SearchOutcome> Search::run() {
  if (auto status = check_plan(); !status) return status.error();
  if (auto status = run::RunFolder::check(folder_name(plan_, options_.out), options_.replace); !status)
    return status.error();
  if (auto status = read_and_prepare(); !status) return status.error();
  if (auto status = open_outputs(); !status) return status.error();
  if (auto status = count_and_announce(); !status) return status.error();
  if (auto status = screen(); !status) return status.error();
  examine();
  if (candidates_.empty() && meter_.stopped())
    return Error{ErrorKind::io, "the search was stopped before it had examined any candidate; nothing is listed", "",
                 "start it again with --replace and let it run longer (with a budget: search.budget, --budget)"};
  if (candidates_.empty())
    return Error{ErrorKind::data,
                 "no candidate is left: " + walked_.n_inseparable.str() +
                     " could not be told apart from others in some fold, " +
                     std::to_string(shortlist_.space.set_aside_direction) + " contradict a declared direction",
                 prepared_->summary.file,
                 "use fewer folds (search.folds), drop one of two predictors that are nearly the same (data.ignore), "
                 "or relax forms.direction"};
  if (auto status = rank_and_complete(); !status) return status.error();
  describe();
  return write();
}

}  // namespace

Result<SearchOutcome> search(const run::Plan& plan, const SearchOptions& options, std::stop_token stop) {
  return guarded(plan.data.file, [&] { return Search(plan, options, std::move(stop)).run(); });
}

}  // namespace formsieve::pipeline

#include "search/space_walker.hpp"

#include "search/greedy.hpp"
#include "search/saturating.hpp"

#include <algorithm>
#include <bit>
#include <cassert>
#include <cmath>
#include <functional>
#include <limits>

namespace formsieve::search {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// Candidates between two calls of the progress sink where the kernel does not call it.
constexpr std::uint64_t kProgressBatch = 50'000;

std::vector<double> factors(const std::vector<double>& penalty, std::size_t n_rows) {
  std::vector<double> factor;
  for (const double p : penalty) factor.push_back(std::exp(p / static_cast<double>(n_rows)));
  return factor;
}

/// Rounding can carry a sum of squares of an exact fit below zero.
double at_least_zero(double x) { return x < 0.0 ? 0.0 : x; }

PairShape largest_shape(const OuterTree& tree) {
  std::vector<std::size_t> all;
  for (std::size_t s = 0; s < tree.simple().size(); ++s) all.push_back(s);
  return tree.shape(all, tree.most_terms() - std::min(tree.most_terms(), tree.n_always()));
}

/// A predictor is strong when forward selection gains more than this with it, in units of AIC.
constexpr double kStrongGain = 10.0;

/// Predictors that matter, strongest first, judged on the first of the responses.
std::vector<std::size_t> strong_predictors(const Space& space, const base::GramSet& grams, const WalkOptions& options,
                                           std::size_t first_response) {
  const OuterTree tree(space);
  if (!tree.possible()) return {};
  std::vector<double> penalty;
  for (std::size_t k = 0; k <= tree.most_columns(); ++k) penalty.push_back(kStrongGain * static_cast<double>(k));
  return forward_selection(tree, outer_root(tree, grams, first_response, 1), 0, factors(penalty, grams.n_rows),
                           options.smallest_pivot_rel)
      .predictors;
}

}  // namespace

WalkSetup::WalkSetup(const Space& space_, const base::GramSet& grams, const WalkOptions& options_,
                     std::size_t first_response_, std::size_t n_responses)
    : WalkSetup(space_, grams, options_, first_response_, n_responses,
                strong_predictors(space_, grams, options_, first_response_)) {}

WalkSetup::WalkSetup(const Space& space_, const base::GramSet& grams, const WalkOptions& options_,
                     std::size_t first_response_, std::size_t n_responses, const std::vector<std::size_t>& strong)
    : space(space_),
      options(options_),
      first_response(first_response_),
      tree(space_, strong),
      root(outer_root(tree, grams, first_response, n_responses)),
      smallest(smallest_pivots(root, options_.smallest_pivot_rel)),
      root_diagonal(smallest_pivots(root, 1.0)),
      n_rows(grams.n_rows),
      cells(space_) {
  if (options.summary_penalty.empty() || !tree.possible()) return;
  assert(options.summary_penalty.size() > tree.most_columns());
  summary.wanted = true;
  summary.factor = factors(options.summary_penalty, n_rows);
  // what is left out weighs, candidate by candidate, at most this share of the unit's weight
  const double n_candidates = static_cast<double>(tree.size({}));
  summary.range =
      std::exp(2.0 * std::log(n_candidates / search::Summary::kNegligibleWeight) / static_cast<double>(n_rows));
  for (std::size_t r = 0; r < n_responses; ++r) {
    const double found = forward_selection(tree, root, r, summary.factor, options.smallest_pivot_rel).penalised_rss;
    const double tiny = std::numeric_limits<double>::min() / std::numeric_limits<double>::epsilon();
    unit_exponent.push_back(search::unit_exponent(root.cv_sse(r)));
    summary.first_bin.push_back(first_bin(unit_exponent.back()));
    summary.unit.push_back(std::isfinite(found) ? std::max(found, tiny) : root.rss(r));
  }
}

double WalkSetup::limit(const PoolRule& rule, std::size_t response) const {
  return rule.limit.empty() ? kInfinity : rule.limit[first_response + response];
}

SpaceWalker::SpaceWalker(const WalkSetup& setup)
    : setup_(setup),
      largest_shape_(largest_shape(setup.tree)),
      pairs_(largest_shape_, setup.root.n_folds(), setup.root.n_responses(), setup.n_rows,
             setup.options.smallest_pivot_rel, setup.summary, *this),
      levels_(setup.tree.most_terms()),
      scratch_(2 * setup.root.order()),
      best_(setup.cells, setup.root.n_responses()) {
  const OuterTree& tree = setup.tree;
  const std::uint64_t n_candidates = tree.size({});
  for (const PoolRule& rule : setup.options.rules) {
    assert(rule.score == Score::cv_sse || rule.penalty.size() > tree.most_columns());
    criteria_.push_back({rule.score, factors(rule.penalty, setup.n_rows)});
    const auto keep = static_cast<std::size_t>(std::min<std::uint64_t>(rule.keep, n_candidates));
    for (std::size_t r = 0; r < setup.root.n_responses(); ++r)
      lists_.emplace_back(keep, tree.most_terms(), setup.limit(rule, r));
  }
  terms_.reserve(tree.most_terms());
  pairs_.limit_rss().assign((tree.most_columns() + 1) * setup.root.n_responses(), kInfinity);
  for (std::size_t r = 0; r < setup.root.n_responses(); ++r) set_limits(r);
}

// ---- outer nodes ---------------------------------------------------------------------------------------------------

bool SpaceWalker::bring_in_form(std::size_t form) {
  const OuterForm& entry = setup_.tree.forms()[form];
  auto& level = levels_[path_.size()];
  if (level == nullptr)
    level = std::make_unique<OuterGrams>(setup_.root.n_columns(), setup_.root.n_responses(), setup_.root.n_folds());
  if (!search::bring_in(entry, node(), *level, setup_.smallest, scratch_)) return false;
  path_.push_back(form);
  n_columns_ += entry.n_columns;
  kernel_ = nullptr;
  return true;
}

bool SpaceWalker::enter(std::span<const std::size_t> path) {
  std::size_t shared = 0;
  while (shared < path_.size() && shared < path.size() && path_[shared] == path[shared]) ++shared;
  while (path_.size() > shared) {
    n_columns_ -= setup_.tree.forms()[path_.back()].n_columns;
    path_.pop_back();
    kernel_ = nullptr;
  }
  for (std::size_t i = shared; i < path.size(); ++i)
    if (!bring_in_form(path[i])) return false;
  return true;
}

WeightLogs SpaceWalker::walk(const Part& part, std::uint64_t largest) {
  if (setup_.summary.wanted) weights_.assign(setup_.root.n_responses() * setup_.cells.n, {});
  if (!enter(part.outer)) {
    // a part above counts what is below when it could not be entered itself
    if (part.lanes.empty() && path_.size() + 1 == part.outer.size())
      n_outer_inseparable_ += setup_.root.n_responses() * setup_.tree.size(part.outer);
  } else if (part.with_outer) {
    visit_all();
  } else {
    if (part.lanes.empty()) score_own();
    if (setup_.tree.is_candidate(path_)) run_kernel(part.lanes, largest);
  }
  tick(0);
  WeightLogs logs;
  if (setup_.summary.wanted)
    for (const LogSum& sum : weights_) logs.push_back(sum.value());
  return logs;
}

void SpaceWalker::walk_node(const OuterPath& outer, std::span<const std::size_t> lanes, std::uint64_t largest) {
  assert(!setup_.summary.wanted);
  if (!enter(outer)) return;
  if (lanes.empty()) score_own();
  if (!setup_.tree.is_candidate(path_)) return;
  // a part begins at a node that is stored, others are scored while they are made
  const PairShape& shape = kernel().shape;
  const bool begins_part =
      lanes.empty() || (setup_.tree.size(path_) > largest &&
                        shape.size(shape.most_picks - lanes.size(), shape.predictor_of_lane[lanes.back()]) > largest);
  if (begins_part) {
    run_kernel(lanes, 0);
  } else {
    load_kernel();
    const auto parent = lanes.first(lanes.size() - 1);
    if (pairs_.enter(parent) == parent.size()) pairs_.run_child(lanes.back());
  }
}

/// The node, the kernel below it, and all outer nodes below.
void SpaceWalker::visit_all() {
  if (setup_.options.stop.stop_requested()) stopped_ = true;
  if (stopped_) return;
  const OuterTree& tree = setup_.tree;
  score_own();
  if (tree.is_candidate(path_)) run_kernel({}, kCountless);
  if (!tree.may_pick(path_)) return;
  const std::size_t n_path = path_.size();
  for (std::size_t g = tree.open_groups(path_); g-- > tree.first_group(std::span(path_).first(n_path));) {
    for (std::size_t form = tree.first_form(g); form < tree.end_form(g) && !stopped_; ++form) {
      if (bring_in_form(form)) {
        visit_all();
        enter(OuterPath(path_.begin(), path_.begin() + static_cast<std::ptrdiff_t>(n_path)));
      } else {
        path_.push_back(form);
        n_outer_inseparable_ += setup_.root.n_responses() * tree.size(path_);
        path_.pop_back();
      }
    }
  }
}

/// The outer node's own candidate.
void SpaceWalker::score_own() {
  if (!setup_.tree.is_candidate(path_)) return;
  const OuterGrams& grams = node();
  for (std::size_t r = 0; r < grams.n_responses(); ++r) {
    const double cv = at_least_zero(grams.cv_sse(r));
    const double rss = at_least_zero(grams.rss(r));
    terms_.clear();
    for (const std::size_t form : path_)
      terms_.push_back(term_code(setup_.tree.forms()[form].predictor, setup_.tree.forms()[form].choice));
    std::sort(terms_.begin(), terms_.end(), std::greater<>());
    offer_one(r, cv, rss, n_columns_);
    if (!setup_.summary.wanted) continue;
    const double penalised = rss * setup_.summary.factor[n_columns_];
    const double floor = 1e-28 * static_cast<double>(setup_.n_rows);
    PairHarvest::Figures figures{{cv, penalised},
                                 -0.5 * static_cast<double>(setup_.n_rows) * std::log(std::max(penalised, floor))};
    add_everywhere(r, figures, {});
    for (const std::size_t s : kernel().simple)
      add(r, setup_.cells.choice(setup_.tree.simple()[s].predictor, 0), figures);
    add(r, setup_.cells.terms(path_.size()), figures);
    ++best_.histogram[r * search::Summary::kBins + histogram_bin(cv, setup_.summary.first_bin[r])];
  }
  n_outer_scored_ += grams.n_responses();
  if (n_scored() - n_reported_ >= kProgressBatch) tick(0);
}

const SpaceWalker::Kernel& SpaceWalker::kernel() {
  if (kernel_ != nullptr) return *kernel_;
  const OuterTree& tree = setup_.tree;
  std::vector<std::size_t> simple = tree.open_simple(path_);
  const std::size_t picks = tree.most_terms() - path_.size();
  auto& entry = kernels_[{simple, picks}];
  if (entry == nullptr) {
    std::vector<std::size_t> first_column;
    for (const std::size_t s : simple) first_column.push_back(tree.simple()[s].first_column);
    PairShape shape = tree.shape(simple, picks);
    entry = std::make_unique<Kernel>(Kernel{std::move(simple), std::move(first_column), std::move(shape)});
  }
  kernel_ = entry.get();
  return *kernel_;
}

void SpaceWalker::load_kernel() {
  if (loaded_ && loaded_path_ == path_) return;
  const Kernel& below = kernel();
  pairs_.load(below.shape, below.first_column, node(), setup_.root_diagonal, n_columns_);
  loaded_path_ = path_;
  loaded_ = true;
}

void SpaceWalker::run_kernel(std::span<const std::size_t> lanes, std::uint64_t largest) {
  const Kernel& below = kernel();
  if (below.simple.empty() || below.shape.most_picks == 0) return;
  load_kernel();
  const std::size_t entered = pairs_.enter(lanes);
  if (entered < lanes.size()) {
    if (entered + 1 < lanes.size()) return;  // a part above has counted it
    const std::size_t open = below.shape.predictor_of_lane[lanes.back()];
    // itself and its pairs were scored, or counted, above
    n_outer_inseparable_ += setup_.root.n_responses() * (below.shape.size(below.shape.most_picks - lanes.size(), open) -
                                                         1 - below.shape.columns(open));
    return;
  }
  pairs_.run(largest);
  if (pairs_.stopped()) stopped_ = true;
  if (setup_.summary.wanted) add_run(lanes);
}

// ---- the summary ---------------------------------------------------------------------------------------------------

void SpaceWalker::add(std::size_t response, std::size_t cell, const PairHarvest::Figures& figures) {
  const std::size_t at = response * setup_.cells.n + cell;
  best_.lower(at, figures.best);
  weights_[at].add(figures.log_weight);
}

/// Figures of candidates that all have the outer path and these lanes, and nothing in their stead.
void SpaceWalker::add_everywhere(std::size_t response, const PairHarvest::Figures& figures,
                                 std::span<const std::size_t> lanes) {
  const OuterTree& tree = setup_.tree;
  add(response, setup_.cells.all(), figures);
  for (const std::size_t form : path_)
    add(response, setup_.cells.choice(tree.forms()[form].predictor, tree.forms()[form].choice), figures);
  const Kernel& below = kernel();
  for (const std::size_t lane : lanes) {
    const std::size_t p = below.shape.predictor_of_lane[lane];
    const SimplePredictor& simple = tree.simple()[below.simple[p]];
    add(response, setup_.cells.choice(simple.predictor, simple.choices[lane - below.shape.first_lane[p]]), figures);
  }
  // predictors with forms of several columns only, which the kernel does not know
  for (std::size_t g = 0; g < tree.n_groups(); ++g) {
    if (tree.is_always(g)) continue;
    const std::size_t predictor = tree.forms()[tree.first_form(g)].predictor;
    const bool picked = std::any_of(path_.begin(), path_.end(),
                                    [&](std::size_t form) { return tree.forms()[form].predictor == predictor; });
    const bool simple = std::any_of(tree.simple().begin(), tree.simple().end(),
                                    [&](const SimplePredictor& s) { return s.predictor == predictor; });
    if (!picked && !simple) add(response, setup_.cells.choice(predictor, 0), figures);
  }
}

void SpaceWalker::add_run(std::span<const std::size_t> lanes) {
  pairs_.harvest(harvest_);
  const Kernel& below = kernel();
  const PairShape& shape = below.shape;
  const std::size_t open = lanes.empty() ? shape.n_predictors() : shape.predictor_of_lane[lanes.back()];
  for (std::size_t r = 0; r < setup_.root.n_responses(); ++r) {
    add_everywhere(r, harvest_.all[r], lanes);
    for (std::size_t p = 0; p < shape.n_predictors(); ++p) {
      const SimplePredictor& simple = setup_.tree.simple()[below.simple[p]];
      const auto cell = [&](std::size_t choice) { return setup_.cells.choice(simple.predictor, choice); };
      const bool picked =
          std::any_of(lanes.begin(), lanes.end(), [&](std::size_t lane) { return shape.predictor_of_lane[lane] == p; });
      if (picked) continue;
      add(r, cell(0), p < open ? harvest_.absent[r][p] : harvest_.all[r]);
      if (p >= open) continue;
      for (std::size_t f = 0; f < simple.choices.size(); ++f)
        add(r, cell(simple.choices[f]), harvest_.column[r][shape.first_lane[p] + f]);
    }
    for (std::size_t k = 0; k < harvest_.picks[r].size(); ++k)
      if (harvest_.picks[r][k].best[0] < kInfinity) add(r, setup_.cells.terms(path_.size() + k), harvest_.picks[r][k]);
  }
}

BestStandings SpaceWalker::standings() const {
  BestStandings all = best_;
  if (!setup_.summary.wanted) return all;
  const auto of_pairs = pairs_.histogram();
  for (std::size_t i = 0; i < all.histogram.size(); ++i) all.histogram[i] += of_pairs[i];
  return all;
}

// ---- the lists -----------------------------------------------------------------------------------------------------

double SpaceWalker::score_of(const Criterion& criterion, double cv_sse, double rss, std::size_t n_columns) {
  if (criterion.score == Score::cv_sse) return cv_sse;
  const double factor = criterion.factor[n_columns];
  // an infinite penalty stays infinite for an exact fit, whose RSS is zero
  return std::isinf(factor) ? factor : rss * factor;
}

/// What the kernel must show: everything up to the worst of the lists.
void SpaceWalker::set_limits(std::size_t response) {
  const std::size_t n_responses = setup_.root.n_responses();
  double cv = -kInfinity;
  for (std::size_t k = 0; k <= setup_.tree.most_columns(); ++k) {
    double limit = -kInfinity;
    for (std::size_t i = 0; i < criteria_.size(); ++i) {
      const double worst = lists_[i * n_responses + response].worst_score();
      if (criteria_[i].score == Score::cv_sse) {
        cv = std::max(cv, worst);
      } else if (worst == kInfinity) {
        limit = kInfinity;
      } else {
        // rounding of the quotient must not hide a candidate that ties
        constexpr double kSlack = 1.0 + 4.0 * std::numeric_limits<double>::epsilon();
        limit = std::max(limit, worst / criteria_[i].factor[k] * kSlack);
      }
    }
    pairs_.limit_rss()[k * n_responses + response] = limit;
  }
  pairs_.limit_cv()[response] = cv;
}

void SpaceWalker::offer_one(std::size_t response, double cv_sse, double rss, std::size_t n_columns) {
  bool changed = false;
  for (std::size_t i = 0; i < criteria_.size(); ++i) {
    BestList& list = lists_[i * setup_.root.n_responses() + response];
    const double score = score_of(criteria_[i], cv_sse, rss, n_columns);
    if (!(score <= list.worst_score())) continue;
    const double before = list.worst_score();
    list.offer({score, cv_sse, rss, n_columns, terms_});
    changed = changed || list.worst_score() != before;
  }
  if (changed) set_limits(response);
}

void SpaceWalker::push_lane(std::size_t lane) {
  const Kernel& below = *kernel_;
  const std::size_t p = below.shape.predictor_of_lane[lane];
  const SimplePredictor& simple = setup_.tree.simple()[below.simple[p]];
  terms_.push_back(term_code(simple.predictor, simple.choices[lane - below.shape.first_lane[p]]));
}

void SpaceWalker::offer(std::size_t response, std::size_t n_path, std::size_t row, std::size_t first_lane,
                        unsigned mask, const double* cv_sse, const double* rss) {
  for (; mask != 0; mask &= mask - 1) {
    const auto i = static_cast<std::size_t>(std::countr_zero(mask));
    terms_.clear();
    for (const std::size_t form : path_)
      terms_.push_back(term_code(setup_.tree.forms()[form].predictor, setup_.tree.forms()[form].choice));
    for (std::size_t d = 0; d < n_path; ++d) push_lane(pairs_.path()[d]);
    if (row != kNone) push_lane(row);
    push_lane(first_lane + i);
    std::sort(terms_.begin(), terms_.end(), std::greater<>());
    offer_one(response, cv_sse[i], rss[i], n_columns_ + n_path + (row != kNone ? 2 : 1));
  }
}

bool SpaceWalker::tick(std::uint64_t) {
  const std::uint64_t done = n_scored();
  if (done > n_reported_ && setup_.options.progress) setup_.options.progress(done - n_reported_);
  n_reported_ = done;
  return setup_.options.stop.stop_requested();
}

}  // namespace formsieve::search

#include "plain/subtree_walker.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <functional>
#include <limits>

namespace formsieve::plain {

using namespace search;

namespace {

/// Scores between two calls of the progress sink: some milliseconds of work, so that the call costs nothing.
constexpr std::uint64_t kProgressBatch = 50'000;

std::vector<double> factors(const PoolRule& rule, std::size_t n_rows) {
  if (rule.score == Score::cv_sse) return {};
  std::vector<double> factor;
  for (const double penalty : rule.penalty) factor.push_back(std::exp(penalty / static_cast<double>(n_rows)));
  return factor;
}

/// Rounding can carry a sum of squares of an exact fit below zero.
double at_least_zero(double x) { return x < 0.0 ? 0.0 : x; }

}  // namespace

SubtreeWalker::SubtreeWalker(const Tree& tree, const Root& root, const WalkOptions& options,
                             std::uint64_t largest_subtree)
    : tree_(tree),
      root_(root),
      options_(options),
      largest_subtree_(largest_subtree),
      multipliers_(tree.n_columns()),
      pivots_(tree.n_columns(), tree.n_responses(), tree.widest_form()),
      path_(tree.max_depth()),
      n_columns_(tree.max_depth() + 1, 0) {
  const std::uint64_t n_candidates = tree.size(0, tree.n_predictors());
  for (const PoolRule& rule : options.rules) {
    assert(rule.score == Score::cv_sse || rule.penalty.size() > tree.most_columns());
    criteria_.push_back({rule.score, factors(rule, root.n_rows)});
    const auto keep = static_cast<std::size_t>(std::min<std::uint64_t>(rule.keep, n_candidates));
    for (std::size_t r = 0; r < tree.n_responses(); ++r) lists_.emplace_back(keep, tree.max_depth());
  }
  for (std::size_t depth = 0; depth < tree.max_depth(); ++depth) {
    const std::size_t open = tree.n_predictors() - depth;
    if (depth > 0) levels_.emplace_back(tree, depth, root.n_folds);
    separable_.emplace_back(tree.n_forms(open));
  }
  const std::size_t stride = tree.n_columns();
  scratch_.resize(2 * (1 + tree.n_responses()) * stride);
  double* const start = scratch_.data();
  scores_ = {0, 0, stride, start, start + stride, start + 2 * stride, start + (2 + tree.n_responses()) * stride};
  terms_.reserve(tree.max_depth());
}

bool SubtreeWalker::enter(std::span<const std::size_t> path) {
  entered_depth_ = 0;
  entered_open_ = tree_.n_predictors();
  for (const std::size_t form : path) {
    if (!descend(entered_depth_, form)) return false;
    ++entered_depth_;
    entered_open_ = tree_.forms()[form].position;
  }
  return true;
}

void SubtreeWalker::walk() {
  if (entered_depth_ == 0 && tree_.is_candidate(0)) score_empty();
  if (tree_.has_children(entered_depth_, entered_open_)) visit(entered_depth_, entered_open_);
  report_progress();
}

void SubtreeWalker::visit(std::size_t depth, std::size_t open) {
  if (options_.stop.stop_requested()) {
    stopped_ = true;
    return;
  }
  score_children(depth, open);
  for (std::size_t q = open; q-- > tree_.first_pick(depth, open);) {
    if (!tree_.has_children(depth + 1, q) || tree_.size(depth + 1, q) > largest_subtree_) continue;
    for (std::size_t f = tree_.n_forms(q); f < tree_.n_forms(q + 1); ++f)
      if (separable_[depth][f] != 0 && descend(depth, f)) visit(depth + 1, q);
  }
}

void SubtreeWalker::score_children(std::size_t depth, std::size_t open) {
  const PartialGrams& node = grams(depth);
  const std::size_t first = tree_.first_pick(depth, open);
  scores_.first = tree_.columns(first);
  scores_.last = tree_.columns(open);
  clear(scores_, tree_.n_responses());
  for (std::size_t f = 0; f < root_.n_folds; ++f)
    add_fold(node.fold(f), root_.smallest_pivot[f].data(), tree_.n_responses(), scores_);
  set_rss(node.all_rows(), root_.smallest_pivot[root_.n_folds].data(), tree_.n_responses(), scores_);

  const std::size_t first_form = tree_.n_forms(first);
  const std::size_t last_form = tree_.n_forms(open);
  if (tree_.widest_form() > 1)
    for (std::size_t f = first_form; f < last_form; ++f)
      if (tree_.forms()[f].n_columns > 1) score_wide_form(depth, tree_.forms()[f]);
  account(depth, first_form, last_form);
  if (tree_.is_candidate(depth + 1)) offer_children(depth, first_form, last_form);
}

/// Puts the scores of a form of several columns where its first column stands.
void SubtreeWalker::score_wide_form(std::size_t depth, const TreeForm& form) {
  const PartialGrams& node = grams(depth);
  const std::size_t c = form.first_column;
  for (std::size_t r = 0; r < tree_.n_responses(); ++r) scores_.cv_sse[r * scores_.stride + c] = 0.0;
  scores_.margin[c] = -1.0;
  for (std::size_t f = 0; f <= root_.n_folds; ++f) {
    const bool is_fold = f < root_.n_folds;
    const auto& [training, validation] = node.fold(f);
    if (!pivots_.load(tree_, form, 0, training, is_fold ? &validation : nullptr, root_.smallest_pivot[f].data()))
      return;
    for (std::size_t r = 0; r < tree_.n_responses(); ++r) {
      if (is_fold)
        scores_.cv_sse[r * scores_.stride + c] += validation.own[r] + pivots_.validation_change(r);
      else
        scores_.rss[r * scores_.stride + c] = training.own[r] + pivots_.training_change(r);
    }
  }
  scores_.margin[c] = 1.0;
}

/// Marks the children that may be entered and counts every child, the inseparable ones with all below them.
void SubtreeWalker::account(std::size_t depth, std::size_t first_form, std::size_t last_form) {
  std::uint64_t n_separable = 0;
  for (std::size_t f = first_form; f < last_form; ++f) {
    const TreeForm& form = tree_.forms()[f];
    const bool separable = scores_.margin[form.first_column] > 0.0;
    separable_[depth][f] = separable ? 1 : 0;
    if (separable)
      ++n_separable;
    else
      n_inseparable_ = saturating_add(n_inseparable_,
                                      saturating_multiply(tree_.n_responses(), tree_.size(depth + 1, form.position)));
  }
  if (tree_.is_candidate(depth + 1)) count_scored(n_separable * tree_.n_responses());
}

double SubtreeWalker::score_of(const Criterion& criterion, double cv_sse, double rss, std::size_t n_columns) const {
  if (criterion.score == Score::cv_sse) return cv_sse;
  const double factor = criterion.factor[n_columns];
  // an infinite penalty stays infinite for an exact fit, whose RSS is zero
  return std::isinf(factor) ? factor : rss * factor;
}

void SubtreeWalker::offer_children(std::size_t depth, std::size_t first_form, std::size_t last_form) {
  const std::size_t n_responses = tree_.n_responses();
  for (std::size_t i = 0; i < lists_.size(); ++i) {
    BestList& list = lists_[i];
    const Criterion& criterion = criteria_[i / n_responses];
    const double* cv_sse = scores_.cv_sse + (i % n_responses) * scores_.stride;
    const double* rss = scores_.rss + (i % n_responses) * scores_.stride;
    for (std::size_t f = first_form; f < last_form; ++f) {
      if (separable_[depth][f] == 0) continue;
      const TreeForm& form = tree_.forms()[f];
      const double cv_sse_f = at_least_zero(cv_sse[form.first_column]);
      const double rss_f = at_least_zero(rss[form.first_column]);
      const std::size_t n_columns = n_columns_[depth] + form.n_columns;
      const double score = score_of(criterion, cv_sse_f, rss_f, n_columns);
      if (!(score <= list.worst_score())) continue;
      path_[depth] = f;
      offer(list, score, cv_sse_f, rss_f, n_columns, depth + 1);
    }
  }
}

void SubtreeWalker::score_empty() {
  for (std::size_t i = 0; i < lists_.size(); ++i) {
    const std::size_t r = i % tree_.n_responses();
    double cv_sse = 0.0;
    for (std::size_t f = 0; f < root_.n_folds; ++f) cv_sse += root_.grams.fold(f).validation.own[r];
    const double rss = root_.grams.all_rows().own[r];
    const double score = score_of(criteria_[i / tree_.n_responses()], cv_sse, rss, 0);
    offer(lists_[i], score, cv_sse, rss, 0, 0);
  }
  count_scored(tree_.n_responses());
}

bool SubtreeWalker::descend(std::size_t depth, std::size_t form_index) {
  const TreeForm& form = tree_.forms()[form_index];
  for (std::size_t f = 0; f <= root_.n_folds; ++f)
    if (!eliminate(depth, form, f)) return false;
  path_[depth] = form_index;
  n_columns_[depth + 1] = n_columns_[depth] + form.n_columns;
  return true;
}

/// Brings a form into one fold; false when it is not separable there.
bool SubtreeWalker::eliminate(std::size_t depth, const TreeForm& form, std::size_t fold) {
  const bool is_fold = fold < root_.n_folds;
  const double* smallest = root_.smallest_pivot[fold].data();
  const std::size_t n_open = tree_.columns(form.position);
  const std::size_t first_row = tree_.first_row(depth + 1);
  const FoldGrams& parent = grams(depth).fold(fold);
  const FoldGrams& child = levels_[depth].fold(fold);
  if (form.n_columns == 1) {
    if (!is_separable(parent.training.diagonal[form.first_column], smallest[form.first_column])) return false;
    if (is_fold)
      eliminate_fold(tree_, form.first_column, first_row, n_open, parent, child, multipliers_);
    else
      eliminate_all_rows(tree_, form.first_column, first_row, n_open, parent.training, child.training, multipliers_);
    return true;
  }
  if (!pivots_.load(tree_, form, n_open, parent.training, is_fold ? &parent.validation : nullptr, smallest))
    return false;
  pivots_.apply_training(tree_, first_row, parent.training, child.training);
  if (is_fold) pivots_.apply_validation(tree_, first_row, parent.validation, child.validation);
  return true;
}

void SubtreeWalker::offer(BestList& list, double score, double cv_sse, double rss, std::size_t n_columns,
                          std::size_t n_terms) {
  terms_.clear();
  for (std::size_t d = 0; d < n_terms; ++d) {
    const TreeForm& form = tree_.forms()[path_[d]];
    terms_.push_back(term_code(form.predictor, form.choice));
  }
  std::sort(terms_.begin(), terms_.end(), std::greater<>());
  list.offer({score, cv_sse, rss, n_columns, terms_});
}

void SubtreeWalker::count_scored(std::uint64_t n) {
  n_scored_ += n;
  n_unreported_ += n;
  if (n_unreported_ >= kProgressBatch) report_progress();
}

void SubtreeWalker::report_progress() {
  if (n_unreported_ > 0 && options_.progress) options_.progress(n_unreported_);
  n_unreported_ = 0;
}

}  // namespace formsieve::plain

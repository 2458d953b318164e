#include "search/guided_look.hpp"

#include <algorithm>
#include <bit>
#include <limits>

namespace formsieve::search {

namespace {
constexpr double kInfinity = std::numeric_limits<double>::infinity();
}  // namespace

Look::Look(const GuidedSpace& space, const Objective& objective)
    : space_(space), objective_(objective), elimination_(objective) {
  for (std::size_t g = 0; g < space.forms().size(); ++g)
    if (space.forms()[g].n_columns > 1) wide_.push_back(g);
}

OpenState& Look::state(std::size_t depth) {
  while (states_.size() <= depth) states_.emplace_back(objective_.width());
  return states_[depth];
}

void Look::start(std::size_t n_bases) {
  bases_.resize(n_bases);
  for (Extensions& base : bases_) base.base_score = 0.0;
  sums_.assign(n_bases * objective_.width(), 0.0);
  wide_sums_.assign(n_bases * wide_.size(), 0.0);
  scores_.resize(n_bases * space_.forms().size());
}

void Look::add(std::size_t base, OpenState& state) {
  Extensions& extensions = bases_[base];
  if (!state.separable) extensions.base_score = kInfinity;
  if (extensions.base_score == kInfinity) return;  // so are all extensions: see finish
  extensions.base_score += state.sse;
  add_scores(state.columns(), least_, state.sse, objective_.width(), sums_.data() + base * objective_.width());
  for (std::size_t w = 0; w < wide_.size(); ++w) {
    const OpenForm& form = space_.forms()[wide_[w]];
    double& sum = wide_sums_[base * wide_.size() + w];
    if (extensions.base[form.predictor] == 0 && sum != kInfinity) sum += elimination_.score_wide(form, state);
  }
}

void Look::finish() {
  const std::size_t n_forms = space_.forms().size();
  const auto in_units = [&](double sum) { return std::max(sum, 0.0) * objective_.unit(); };  // as cv_sse_of
  for (std::size_t b = 0; b < bases_.size(); ++b) {
    double* const with = scores_.data() + b * n_forms;
    const bool separable = bases_[b].base_score != kInfinity;
    for (std::size_t g = 0; g < n_forms; ++g)
      with[g] = separable ? in_units(sums_[b * objective_.width() + space_.forms()[g].first_column]) : kInfinity;
    for (std::size_t w = 0; separable && w < wide_.size(); ++w)
      with[wide_[w]] = in_units(wide_sums_[b * wide_.size() + w]);
    bases_[b].base_score = in_units(bases_[b].base_score);
    bases_[b].with = {with, n_forms};
  }
}

Extensions Look::extend(const Choices& base) {
  start(1);
  bases_[0].base = base;
  OpenState& open = state(0);
  for (std::size_t f = 0; f < objective_.n_folds(); ++f) {
    const ObjectiveFold fold = objective_.fold(f);
    least_ = fold.least;
    elimination_.begin(fold, open);
    for (std::size_t j = 0; j < base.size(); ++j)
      if (base[j] != 0) elimination_.push(space_.form(j, base[j]), open);
    add(0, open);
  }
  finish();
  return bases_[0];
}

/// Scores the candidate without each of its predictors first … last − 1, all others being eliminated.
void Look::halve(std::size_t first, std::size_t last, std::size_t depth) {
  OpenState& here = states_[depth];
  const std::size_t n_pivots = elimination_.n_pivots();
  if (last - first == 1) {
    add(first, here);
    if (first > 0) return;
    states_[depth + 1] = here;
    elimination_.push(*present_[0], states_[depth + 1]);
    add(present_.size(), states_[depth + 1]);
    elimination_.pop_to(n_pivots);
    return;
  }
  const std::size_t middle = first + (last - first) / 2;
  states_[depth + 1] = here;
  for (std::size_t i = middle; i < last; ++i) elimination_.push(*present_[i], states_[depth + 1]);
  halve(first, middle, depth + 1);
  elimination_.pop_to(n_pivots);
  states_[depth + 1] = here;
  for (std::size_t i = first; i < middle; ++i) elimination_.push(*present_[i], states_[depth + 1]);
  halve(middle, last, depth + 1);
  elimination_.pop_to(n_pivots);
}

const std::vector<Extensions>& Look::around(const Choices& candidate) {
  present_.clear();
  for (std::size_t j = 0; j < candidate.size(); ++j)
    if (candidate[j] != 0) present_.push_back(&space_.form(j, candidate[j]));
  start(present_.size() + 1);
  for (std::size_t i = 0; i <= present_.size(); ++i) {
    bases_[i].base = candidate;
    if (i < present_.size()) bases_[i].base[present_[i]->predictor] = 0;
  }
  state(std::bit_width(present_.size()) + 2);  // as deep as halving goes, and one more
  for (std::size_t f = 0; f < objective_.n_folds(); ++f) {
    const ObjectiveFold fold = objective_.fold(f);
    least_ = fold.least;
    elimination_.begin(fold, states_[0]);
    if (present_.empty())
      add(0, states_[0]);
    else
      halve(0, present_.size(), 0);
  }
  finish();
  return bases_;
}

}  // namespace formsieve::search

#include "search/guided_lists.hpp"

#include "search/own_score.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::search {

Figures figures_of(const GuidedSpace& space, const base::GramSet& grams, std::size_t response, const Choices& choices) {
  constexpr double kInfinity = std::numeric_limits<double>::infinity();
  const auto* const own = own_units_of(grams, response);
  const std::size_t order = grams.order();
  const std::size_t y = grams.n_columns + response;
  CandidateFit fit;
  std::vector<std::size_t> columns;
  columns_of(space.space(), choices, columns);
  // the sums of cv_sse_of and own_scores, from the same coefficients
  double sse = 0.0;
  OwnScores sums;
  for (std::size_t f = 0; f < grams.n_folds; ++f) {
    if (!fit.solve(grams.training[f], order, columns, y)) return {kInfinity, kInfinity, kInfinity, columns.size()};
    sse += fit.held_out_sse(grams.validation[f], order, columns, y);
    if (own != nullptr) add_own_sums(grams, *own, f, columns, fit, sums);
  }
  if (!fit.solve(grams.all, order, columns, y)) return {kInfinity, kInfinity, kInfinity, columns.size()};
  const double unit = grams.response_scale[response] * grams.response_scale[response];
  const double cv_sse = std::max(sse, 0.0) * unit;
  return {cv_sse, std::max(0.0, fit.held_out_sse(grams.all, order, columns, y)) * unit,
          own == nullptr ? cv_sse : own_scores_of(*own, sums).working_response, columns.size()};
}

void ResponseLists::add(const Choices& choices, const Figures& figures) {
  if (figures.cv_sse < std::numeric_limits<double>::infinity()) entries_.try_emplace(choices, Entry{figures, {}});
}

void ResponseLists::settle() {
  for (const By by : {By::cv, By::own}) {
    Ranked& all = ranked(by);
    all.clear();
    for (auto entry = entries_.begin(); entry != entries_.end(); ++entry) all.push_back(entry);
    // entries rise by candidate number
    std::stable_sort(all.begin(), all.end(), [&](auto a, auto b) { return a->second.score(by) < b->second.score(by); });
    all.resize(std::min(keep_, all.size()));
  }
  std::vector<const Choices*> kept;
  for (const Ranked& all : ranked_)
    for (const auto& entry : all) kept.push_back(&entry->first);
  std::sort(kept.begin(), kept.end());
  std::erase_if(entries_,
                [&](const auto& entry) { return !std::binary_search(kept.begin(), kept.end(), &entry.first); });
}

double ResponseLists::limit(By by) const {
  const Ranked& all = ranked(by);
  if (keep_ == 0) return 0.0;
  return all.size() < keep_ ? std::numeric_limits<double>::infinity() : all.back()->second.score(by);
}

std::vector<Choices> ResponseLists::unexpanded(By by, std::size_t leading, std::size_t most) const {
  std::vector<Choices> found;
  const Ranked& all = ranked(by);
  for (std::size_t i = 0; i < std::min(leading, all.size()) && found.size() < most; ++i)
    if (!all[i]->second.expanded[static_cast<std::size_t>(by)]) found.push_back(all[i]->first);
  return found;
}

void ResponseLists::mark_expanded(By by, const Choices& choices) {
  if (const auto entry = entries_.find(choices); entry != entries_.end())
    entry->second.expanded[static_cast<std::size_t>(by)] = true;
}

std::size_t ResponseLists::n_unexpanded(By by, std::size_t leading) const {
  const Ranked& all = ranked(by);
  const auto last = all.begin() + static_cast<std::ptrdiff_t>(std::min(leading, all.size()));
  return static_cast<std::size_t>(std::count_if(
      all.begin(), last, [&](auto entry) { return !entry->second.expanded[static_cast<std::size_t>(by)]; }));
}

GuidedList ResponseLists::list(By by, const GuidedSpace& space, std::size_t response) const {
  GuidedList list;
  for (const auto& entry : ranked(by)) {
    const Figures& figures = entry->second.figures;
    Choice choice{response, entry->first};
    BigCount number = number_of(space.space(), choice);
    list.candidates.push_back({std::move(choice), std::move(number), figures.cv_sse, figures.rss, figures.n_columns});
    list.sse.push_back(entry->second.score(by));
  }
  while (list.n_expanded < list.sse.size() &&
         ranked(by)[list.n_expanded]->second.expanded[static_cast<std::size_t>(by)])
    ++list.n_expanded;
  return list;
}

std::vector<Found> merged(std::span<const std::vector<Found>* const> finds, std::size_t keep) {
  std::vector<const Found*> all;
  for (const auto* some : finds)
    for (const Found& found : *some) all.push_back(&found);
  // the same candidate met from several sides may differ in the last digits: the least counts
  std::sort(all.begin(), all.end(), [](const Found* a, const Found* b) {
    return a->choices != b->choices ? a->choices < b->choices : a->score < b->score;
  });
  all.erase(
      std::unique(all.begin(), all.end(), [](const Found* a, const Found* b) { return a->choices == b->choices; }),
      all.end());
  std::sort(all.begin(), all.end(), [](const Found* a, const Found* b) { return better(*a, *b); });
  std::vector<Found> best;
  for (std::size_t i = 0; i < std::min(keep, all.size()); ++i) best.push_back(*all[i]);
  return best;
}

}  // namespace formsieve::search

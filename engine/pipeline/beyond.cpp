#include "pipeline/beyond.hpp"

#include "base/parallel.hpp"
#include "judge/words.hpp"
#include "pipeline/penalties.hpp"
#include "search/candidate_fit.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <functional>
#include <set>

namespace formsieve::pipeline {

namespace {

/// A best candidate that one start in so many or more ends in is hardly missed by all of them.
constexpr std::size_t kReassuring = 10;

/// Candidates scored by one task.
constexpr std::size_t kGrain = 64;

using List = std::vector<search::Scored>;

/// The near-best set and the best beyond it, with held-out errors.
List score_near(const Prepared& prepared, const base::GramSet& grams, const Proved& proved, unsigned threads) {
  std::vector<proof::Listed> near = proved.near.best;
  for (const proof::Listed& listed : proved.best.best)
    if (near.empty() || listed.score > near.back().score) near.push_back(listed);
  List scored(near.size());
  base::parallel_for((near.size() + kGrain - 1) / kGrain, threads, [&](std::size_t part) {
    search::CandidateFit fit;
    std::vector<std::size_t> columns;
    for (std::size_t i = part * kGrain; i < std::min(near.size(), (part + 1) * kGrain); ++i) {
      const std::size_t r = near[i].choice.response;
      const double scale = grams.response_scale[r] * grams.response_scale[r];
      const std::size_t y = grams.n_columns + r;
      search::columns_of(prepared.space, near[i].choice.choice, columns);
      scored[i] = {near[i].choice, search::number_of(prepared.space, near[i].choice),
                   scale * search::cv_sse_of(grams, columns, r, fit),
                   scale * near[i].rss_rel * grams.all[y * grams.order() + y], near[i].n_columns};
    }
  });
  return scored;
}

/// Without what is inseparable in a fold; these are counted.
void drop_inseparable(List& list, search::WalkResult& result) {
  result.n_inseparable +=
      std::erase_if(list, [](const search::Scored& scored) { return !std::isfinite(scored.cv_sse); });
}

/// By response, each candidate once, best first by `score`, ties by number.
std::vector<List> sorted(const std::vector<List>& sources, std::size_t n_responses, std::size_t most,
                         const std::function<double(const search::Scored&)>& score) {
  std::vector<List> lists(n_responses);
  for (const List& source : sources)
    for (const auto& scored : source) lists[scored.choice.response].push_back(scored);
  for (List& list : lists) {
    std::sort(list.begin(), list.end(), [&](const auto& a, const auto& b) {
      const double of_a = score(a), of_b = score(b);
      return of_a != of_b ? of_a < of_b : a.number < b.number;
    });
    list.erase(std::unique(list.begin(), list.end(), [](const auto& a, const auto& b) { return a.number == b.number; }),
               list.end());
    list.resize(std::min(most, list.size()));
  }
  return lists;
}

std::vector<List> guided_lists(const search::GuidedResult& guided) {
  std::vector<List> lists;
  for (const auto* family : {&guided.by_cv, &guided.by_own})
    for (const search::GuidedList& list : *family) lists.push_back(list.candidates);
  return lists;
}

std::string count_words(std::size_t count) { return judge::grouped_digits(std::to_string(count)); }

std::string near_pool_words(const run::Plan& plan, const Proved& proved, const std::vector<search::Scored>& pool) {
  std::set<std::pair<std::size_t, std::vector<std::uint16_t>>> pooled;
  for (const auto& scored : pool) pooled.insert({scored.choice.response, scored.choice.choice});
  std::size_t both = 0;
  for (const auto& near : proved.near.best) both += pooled.count({near.choice.response, near.choice.choice});
  char within[32];
  std::snprintf(within, sizeof within, "%g", plan.search.within);
  const bool all = proved.near.proved && !proved.near.full;
  const std::string set = std::string(all ? "the " : "the known ") + count_words(proved.near.best.size()) +
                          " candidates within " + within + " units of the lowest " +
                          (proved.criterion == judge::Criterion::bic    ? "BIC"
                           : proved.criterion == judge::Criterion::aicc ? "AICc"
                                                                        : "AIC");
  if (both == proved.near.best.size()) return "those of lowest criterion, among them all of " + set;
  return "of " + set + " the " + count_words(both) +
         " that come first by the criterion or by held-out error from the Gram matrices";
}

}  // namespace

search::WalkResult beyond_lists(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                                const Beyond& beyond, unsigned threads) {
  search::WalkResult result;
  std::vector<List> sources;
  if (beyond.proved != nullptr) {
    sources.push_back(score_near(prepared, grams, *beyond.proved, threads));
    result.n_scored += sources.back().size();
    drop_inseparable(sources.back(), result);
  }
  if (beyond.guided != nullptr) {
    for (List& list : guided_lists(*beyond.guided)) sources.push_back(std::move(list));
    result.n_scored += beyond.guided->n_scored;
  }
  if (beyond.bounded != nullptr) {
    for (const List& list : beyond.bounded->lists) sources.push_back(list);
    for (const auto& counts : beyond.bounded->counts) result.n_scored += counts.n_scored;
  }
  const std::size_t most = list_length(prepared, plan.search.pool);
  const std::vector<double> penalty = penalties(prepared, criterion_of(plan.rank.by));
  const double n = static_cast<double>(grams.n_rows);
  result.lists.push_back(
      sorted(sources, grams.n_responses, most, [](const search::Scored& scored) { return scored.cv_sse; }));
  result.lists.push_back(sorted(sources, grams.n_responses, most, [&](const search::Scored& scored) {
    return n * std::log(scored.rss) + penalty[scored.n_columns];
  }));
  if (beyond.guided != nullptr && !beyond.guided->by_own.empty()) {
    result.lists.emplace_back();
    for (const search::GuidedList& list : beyond.guided->by_own) result.lists.back().push_back(list.candidates);
    result.lists.back().resize(grams.n_responses);
  }
  return result;
}

std::string beyond_pool_words(const run::Plan& plan, const Beyond& beyond, const std::vector<search::Scored>& pool) {
  std::vector<std::string> parts;
  if (beyond.proved != nullptr && !beyond.proved->near.best.empty())
    parts.push_back(near_pool_words(plan, *beyond.proved, pool));
  if (beyond.guided != nullptr)
    parts.push_back(
        "the best that guided local search met, by held-out error on each response form's scale and to "
        "first order in own units");
  if (beyond.bounded != nullptr)
    parts.push_back(std::string(beyond.bounded->complete ? "the" : "some of the") +
                    " best of each response form by held-out error on its scale");
  std::string words = count_words(pool.size()) + " candidates: ";
  for (std::size_t i = 0; i < parts.size(); ++i) words += (i == 0 ? "" : ", and ") + parts[i];
  return words + "; error in own units is exact within this pool, and a candidate outside it may have a lower one";
}

std::string guided_words(const search::GuidedResult& guided) {
  std::string words = "Guided local search: " + judge::counted(guided.n_restarts, "start") + ", " +
                      judge::grouped_digits(std::to_string(guided.n_scored)) + " candidates scored";
  if (guided.best_response) {
    const auto& lists =
        guided.by_own.empty() || guided.by_own[*guided.best_response].candidates.empty() ? guided.by_cv : guided.by_own;
    const search::GuidedList& list = lists[*guided.best_response];
    words += "; of " + judge::counted(list.n_starts, "independent descent") + " by error in own units, " +
             count_words(list.n_found_best) + " ended in the best one found";
    words += list.n_found_best * kReassuring >= list.n_starts
                 ? ", which makes it likely, though not certain, that nothing better exists"
                 : ", so that better ones may exist";
  }
  return words;
}

}  // namespace formsieve::pipeline

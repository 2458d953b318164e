#include "pipeline/pool.hpp"

#include "judge/words.hpp"
#include "pipeline/penalties.hpp"
#include "pipeline/pilot.hpp"
#include "search/own_score.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <set>
#include <utility>

namespace formsieve::pipeline {

namespace {

/// Candidates of each of the walk's lists that are scored again in own units, as a multiple of the pool. On the demo
/// table, of the 300 best in own units of the leading response form, ln, lists of 2,000 (out of 3 million candidates)
/// hold 265, of 5,000 299, of 10,000 all; and longer lists slow the walk down.
constexpr std::size_t kRescoredPerPooled = 5;
constexpr std::size_t kFewestRescored = 5'000;

/// The candidates of a response that any of the walk's lists holds, by number.
std::vector<const search::Scored*> listed(const search::WalkResult& walked, std::size_t response) {
  std::vector<const search::Scored*> all;
  for (const auto& rule : walked.lists)
    for (const auto& scored : rule[response]) all.push_back(&scored);
  std::sort(all.begin(), all.end(), [](const auto* a, const auto* b) { return a->number < b->number; });
  all.erase(std::unique(all.begin(), all.end(), [](const auto* a, const auto* b) { return a->number == b->number; }),
            all.end());
  return all;
}

/// The best of some candidates by a score, ties by candidate number; `candidates` rise by number.
PoolList best_by(PoolList::Order order, std::size_t response, const std::vector<const search::Scored*>& candidates,
                 const std::vector<double>& sse, std::size_t most) {
  std::vector<std::size_t> rank(candidates.size());
  std::iota(rank.begin(), rank.end(), std::size_t{0});
  std::stable_sort(rank.begin(), rank.end(), [&](std::size_t a, std::size_t b) { return sse[a] < sse[b]; });
  PoolList list{order, response, {}, {}};
  for (std::size_t i = 0; i < std::min(most, rank.size()); ++i) {
    if (!std::isfinite(sse[rank[i]])) break;
    list.candidates.push_back(*candidates[rank[i]]);
    list.sse.push_back(sse[rank[i]]);
  }
  return list;
}

/// The walk's list cut to the pool's length.
PoolList walk_list(const search::WalkResult& walked, std::size_t rule, std::size_t response, std::size_t most) {
  const auto& all = walked.lists[rule][response];
  PoolList list{rule == 0 ? PoolList::Order::cv : PoolList::Order::criterion, response, {}, {}};
  list.candidates.assign(all.begin(), all.begin() + static_cast<std::ptrdiff_t>(std::min(most, all.size())));
  if (rule == 0)
    for (const auto& scored : list.candidates) list.sse.push_back(scored.cv_sse);
  return list;
}

/// The two own-units lists of one response form.
std::pair<PoolList, PoolList> own_lists(const Prepared& prepared, const base::GramSet& grams,
                                        const search::WalkResult& walked, std::size_t response, std::size_t most,
                                        unsigned threads) {
  const auto candidates = listed(walked, response);
  std::vector<search::Choice> choices;
  choices.reserve(candidates.size());
  for (const auto* scored : candidates) choices.push_back(scored->choice);
  std::vector<double> by_weight, by_working;
  for (const search::OwnScores& scores : search::own_scores(prepared.space, grams, choices, threads)) {
    by_weight.push_back(scores.pilot_weight);
    by_working.push_back(scores.working_response);
  }
  return {best_by(PoolList::Order::pilot_weight, response, candidates, by_weight, most),
          best_by(PoolList::Order::working_response, response, candidates, by_working, most)};
}

std::string name_of(const Prepared& prepared, std::size_t response) {
  return forms::term_name(prepared.data.response_forms[response], prepared.summary.response);
}

/// "by AIC", "by AIC and by BIC"
std::string criteria_words(const run::Plan& plan) {
  if (plan.rank.by == "aicc") return "by AIC and by AICc";
  if (plan.rank.by == "bic") return "by AIC and by BIC";
  return "by AIC";
}

std::string joined(const std::vector<std::string>& words, const std::string& last) {
  std::string text;
  for (std::size_t i = 0; i < words.size(); ++i) text += (i == 0 ? "" : i + 1 == words.size() ? last : ", ") + words[i];
  return text;
}

/// Which candidates the own-units lists were drawn from.
std::string drawn_from(const Prepared& prepared, const run::Plan& plan, const search::WalkResult& walked) {
  std::size_t longest = 0;
  std::size_t keep = list_length(prepared, plan.search.pool);
  for (const auto& rule : walked.lists)
    for (const auto& list : rule) longest = std::max(longest, list.size());
  if (longest < keep) return "worked out for every candidate scored";
  return "worked out for the " + judge::grouped_digits(std::to_string(keep)) +
         " best of each response form by held-out error on its scale and " + criteria_words(plan);
}

/// The first candidate of a list that is not pooled, as its root mean squared error over the best's, less one.
std::optional<double> first_left_out(const PoolList& list, const std::set<search::BigCount>& pooled, double best) {
  for (std::size_t i = 0; i < list.candidates.size(); ++i)
    if (!pooled.contains(list.candidates[i].number)) return std::sqrt(list.sse[i] / best) - 1.0;
  return std::nullopt;
}

}  // namespace

std::size_t list_length(const Prepared& prepared, std::size_t pool) {
  const auto& forms = prepared.data.response_forms;
  if (std::all_of(forms.begin(), forms.end(), is_linear)) return pool;
  return std::max(kFewestRescored, kRescoredPerPooled * pool);
}

std::vector<search::PoolRule> pool_rules(const Prepared& prepared, const run::Plan& plan) {
  const std::size_t keep = list_length(prepared, plan.search.pool);
  const auto by = [&](judge::Criterion criterion) {
    return search::PoolRule{search::Score::penalised_rss, keep, penalties(prepared, criterion)};
  };
  std::vector<search::PoolRule> rules = {{search::Score::cv_sse, keep, {}}, by(judge::Criterion::aic)};
  if (plan.rank.by == "aicc") rules.push_back(by(judge::Criterion::aicc));
  if (plan.rank.by == "bic") rules.push_back(by(judge::Criterion::bic));
  return rules;
}

std::vector<PoolList> pool_lists(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                                 const search::WalkResult& walked, unsigned threads) {
  const std::size_t most = plan.search.pool;
  std::vector<PoolList> lists;
  for (std::size_t rule = 0; rule < walked.lists.size(); ++rule)
    for (std::size_t r = 0; r < walked.lists[rule].size(); ++r) lists.push_back(walk_list(walked, rule, r, most));
  for (const auto& own : grams.own_units) {
    auto [by_weight, by_working] = own_lists(prepared, grams, walked, own.response, most, threads);
    lists.push_back(std::move(by_weight));
    lists.push_back(std::move(by_working));
  }
  return lists;
}

std::vector<search::Scored> unite(std::span<const PoolList> lists, std::size_t most) {
  std::vector<search::Scored> pool;
  std::set<search::BigCount> seen;
  std::size_t deepest = 0;
  for (const PoolList& list : lists) deepest = std::max(deepest, list.candidates.size());
  for (std::size_t depth = 0; depth < deepest; ++depth)
    for (const PoolList& list : lists) {
      if (depth >= list.candidates.size() || pool.size() >= most) continue;
      if (seen.insert(list.candidates[depth].number).second) pool.push_back(list.candidates[depth]);
    }
  return pool;
}

std::string pool_words(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                       const search::WalkResult& walked, std::size_t pooled) {
  std::string words = "the " + judge::grouped_digits(std::to_string(pooled)) +
                      " best of these lists, taken in turn: by held-out error on the response form's scale and " +
                      criteria_words(plan) + ", for each of " +
                      judge::counted(prepared.data.response_forms.size(), "response form");
  if (!grams.own_units.empty()) {
    std::vector<std::string> names;
    for (const auto& own : grams.own_units) names.push_back(name_of(prepared, own.response));
    words += "; for " + joined(names, " and ") +
             " also by two estimates of held-out error in own units, to first order about a pilot prediction of each "
             "row (with the pilot's weights, and with its working response), " +
             drawn_from(prepared, plan, walked);
  }
  return words + "; error in own units is exact within this pool";
}

std::string margin_words(const Prepared& prepared, std::span<const PoolList> lists, const search::WalkResult& walked,
                         const std::vector<search::Scored>& pool) {
  if (walked.n_scored <= pool.size()) return "every candidate that was scored is in the pool";
  std::set<search::BigCount> pooled;
  for (const auto& scored : pool) pooled.insert(scored.number);
  // lists whose scores are in own units, hence comparable
  std::vector<const PoolList*> own;
  for (const PoolList& list : lists) {
    const bool own_scale = list.order == PoolList::Order::cv && is_linear(prepared.data.response_forms[list.response]);
    if ((own_scale || list.order == PoolList::Order::working_response) && !list.candidates.empty())
      own.push_back(&list);
  }
  double best = std::numeric_limits<double>::infinity();
  for (const PoolList* list : own) best = std::min(best, list->sse.front());
  if (!(best > 0.0) || std::isinf(best)) return "";  // an exact fit: nothing lies behind it by a share
  std::vector<std::string> behind;
  for (const PoolList* list : own)
    if (const auto share = first_left_out(*list, pooled, best))
      behind.push_back(judge::percent_words(*share) + " for " + name_of(prepared, list->response));
  if (behind.empty()) return "every candidate with an estimate of held-out error in own units is in the pool";
  return "by held-out error in own units (to first order about the pilots), the first candidate left out of the pool "
         "lies behind the best of all by " +
         joined(behind, ", ");
}

}  // namespace formsieve::pipeline

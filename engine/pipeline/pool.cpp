#include "pipeline/pool.hpp"

#include "fit/least_squares.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <set>

namespace formsieve::pipeline {

namespace {

/// Most design columns that a candidate can have.
std::size_t most_columns(const search::Space& space) {
  std::size_t columns = 0;
  for (const auto& predictor : space.predictors) {
    std::size_t widest = 0;
    for (const auto& form : predictor.forms) widest = std::max(widest, form.n_columns);
    columns += widest;
  }
  return columns;
}

template <class Penalty>
search::PoolRule penalised(const Prepared& prepared, std::size_t keep, Penalty penalty) {
  search::PoolRule rule{search::Score::penalised_rss, keep, {}};
  for (std::size_t k = 0; k <= most_columns(prepared.space); ++k) rule.penalty.push_back(penalty(k + 1));
  return rule;
}

std::string percent(double share) {
  char text[32];
  std::snprintf(text, sizeof text, share < 0.095 ? "%.2g %%" : "%.3g %%", 100.0 * share);
  return text;
}

}  // namespace

std::vector<search::PoolRule> pool_rules(const Prepared& prepared, const run::Plan& plan) {
  const std::size_t keep = plan.search.pool;
  const std::size_t n = prepared.data.n_rows;
  std::vector<search::PoolRule> rules = {{search::Score::cv_sse, keep, {}}};
  rules.push_back(penalised(prepared, keep, [](std::size_t coefficients) { return fit::aic_penalty(coefficients); }));
  if (plan.rank.by == "aicc")
    rules.push_back(
        penalised(prepared, keep, [n](std::size_t coefficients) { return fit::aicc_penalty(coefficients, n); }));
  if (plan.rank.by == "bic")
    rules.push_back(
        penalised(prepared, keep, [n](std::size_t coefficients) { return fit::bic_penalty(coefficients, n); }));
  return rules;
}

std::vector<search::Scored> unite(const search::WalkResult& walked, std::size_t most) {
  std::vector<search::Scored> pool;
  std::set<search::BigCount> seen;
  std::size_t deepest = 0;
  for (const auto& rule : walked.lists)
    for (const auto& list : rule) deepest = std::max(deepest, list.size());
  for (std::size_t depth = 0; depth < deepest; ++depth)
    for (const auto& rule : walked.lists)
      for (const auto& list : rule) {
        if (depth >= list.size() || pool.size() >= most) continue;
        if (seen.insert(list[depth].number).second) pool.push_back(list[depth]);
      }
  return pool;
}

std::string pool_words(const Prepared& prepared, const run::Plan& plan, std::size_t pooled) {
  std::string criteria = plan.rank.by == "aicc"  ? ", by AIC and by AICc"
                         : plan.rank.by == "bic" ? ", by AIC and by BIC"
                                                 : " and by AIC";
  return "the " + std::to_string(pooled) + " best by held-out error on the response form's scale" + criteria +
         ", for each of " + std::to_string(prepared.data.response_forms.size()) +
         " response forms in turn; error in own units is exact within this pool";
}

std::string margin_words(const Prepared& prepared, const search::WalkResult& walked,
                         const std::vector<search::Scored>& pool) {
  if (walked.n_scored <= pool.size()) return "every candidate that was scored is in the pool";
  std::set<search::BigCount> pooled;
  for (const auto& scored : pool) pooled.insert(scored.number);
  std::string words;
  for (std::size_t r = 0; r < prepared.data.response_forms.size(); ++r) {
    const auto& list = walked.lists.front()[r];
    if (list.empty()) continue;
    double last = list.front().cv_sse;
    for (const auto& scored : list)
      if (pooled.contains(scored.number)) last = scored.cv_sse;
    const double behind = std::sqrt(last / list.front().cv_sse) - 1.0;
    words += (words.empty() ? "" : ", ") + percent(behind) + " for " +
             forms::term_name(prepared.data.response_forms[r], prepared.summary.response);
  }
  return "the last pooled by held-out error lies behind the best of its response form by " + words;
}

}  // namespace formsieve::pipeline

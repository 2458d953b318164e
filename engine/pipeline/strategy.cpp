#include "pipeline/strategy.hpp"

#include "proof/problem.hpp"

#include <algorithm>

namespace formsieve::pipeline {

namespace {

/// The longest menu.
std::size_t most_forms(const Prepared& prepared) {
  std::size_t most = 0;
  for (const auto& predictor : prepared.space.predictors) most = std::max(most, predictor.forms.size());
  return most;
}

Error too_many_forms(const Prepared& prepared, const run::Plan& plan) {
  const auto& predictors = prepared.space.predictors;
  const auto longest = std::max_element(predictors.begin(), predictors.end(),
                                        [](const auto& a, const auto& b) { return a.forms.size() < b.forms.size(); });
  const std::string& column = prepared.data.predictors[static_cast<std::size_t>(longest - predictors.begin())].column;
  return Error{ErrorKind::plan,
               "'" + column + "' has " + std::to_string(longest->forms.size()) +
                   " forms, and strategy \"proved\" takes at most " + std::to_string(proof::kMostForms),
               where_in_plan(plan, "search.strategy"),
               "shorten its menu (forms.of), or use search.strategy = \"guided\" (--strategy guided)"};
}

std::string in_words(const Prepared& prepared, const Estimate& estimate) {
  return "the " + grouped(estimate.candidates) + " candidates of " + std::to_string(prepared.space.predictors.size()) +
         " predictors";
}

bool fits(const Estimate& estimate, const run::Plan& plan) {
  return estimate.candidates <= kMostCandidates && estimate.total() <= plan.search.budget_seconds;
}

Strategy automatic(const Estimate& estimate, const Prepared& prepared, const run::Plan& plan) {
  // no measured time in these words: they are part of the shortlist, which is the same on every machine
  const std::string budget = duration_words(plan.search.budget_seconds);
  if (fits(estimate, plan))
    return {true,    false,
            false,   false,
            "every", "every candidate is scored: " + in_words(prepared, estimate) + " fit the budget of " + budget};
  const std::string too_long =
      "to score " + in_words(prepared, estimate) + " would take more than the budget of " + budget + ": ";
  if (most_forms(prepared) > proof::kMostForms)
    return {false, false,    true,
            false, "guided", too_long + "guided local search looks for the lowest held-out error, without proof"};
  return {false,
          true,
          true,
          true,
          "proved and guided",
          too_long +
              "the lowest information criterion is found with proof, the lowest held-out error by guided local search"};
}

}  // namespace

Result<Strategy> choose_strategy(const Estimate& estimate, const Prepared& prepared, const run::Plan& plan) {
  const std::string& wanted = plan.search.strategy;
  if (wanted == "auto") return automatic(estimate, prepared, plan);
  if (wanted == "every") {
    if (auto status = check_budget(estimate, prepared, plan); !status) return status.error();
    return Strategy{true, false, false, false, "every", "every candidate is scored, as the plan asks"};
  }
  if (wanted == "guided")
    return Strategy{
        false,    false,
        true,     false,
        "guided", "guided local search looks for the lowest held-out error, as the plan asks; nothing is proved"};
  if (most_forms(prepared) > proof::kMostForms) return too_many_forms(prepared, plan);
  return Strategy{false,
                  true,
                  false,
                  false,
                  "proved",
                  "the lowest information criterion is found with proof, as the plan asks; held-out error is judged "
                  "among the candidates nearest to it"};
}

}  // namespace formsieve::pipeline

#include "checks/checks.hpp"

#include "checks/holm.hpp"
#include "checks/workings.hpp"

namespace formsieve::checks {

namespace {

/// Holm over the checks that have a p-value; those pass at the level.
void adjust_together(std::vector<Check>& checks) {
  std::vector<double> p;
  for (const Check& check : checks)
    if (check.p) p.push_back(*check.p);
  const auto adjusted = holm(p);
  std::size_t next = 0;
  for (Check& check : checks) {
    if (!check.p) continue;
    check.p_adjusted = adjusted[next++];
    check.passes = *check.p_adjusted >= kLevel;
  }
}

}  // namespace

std::vector<Check> run_all(const Subject& subject) {
  const Workings workings = prepare(subject);
  std::vector<Check> checks{normal_residuals(workings), equal_spread(workings),    equal_spread_by_term(workings),
                            straightness(workings),     separable_terms(workings), no_single_row(workings)};
  if (subject.has_order) checks.push_back(independence(workings));
  adjust_together(checks);
  return checks;
}

std::vector<std::string> names() {
  return {"normal-residuals", "equal-spread",  "equal-spread-by-term", "straightness",
          "separable-terms",  "no-single-row", "independence"};
}

}  // namespace formsieve::checks

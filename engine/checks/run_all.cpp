#include "checks/checks.hpp"

#include "checks/holm.hpp"
#include "checks/verdict.hpp"
#include "checks/workings.hpp"

#include <array>

namespace formsieve::checks {

namespace {

/// Holm over the checks that have a p-value.
void adjust_together(std::vector<Check>& checks) {
  std::vector<double> p;
  for (const Check& check : checks)
    if (check.p) p.push_back(*check.p);
  const auto adjusted = holm(p);
  std::size_t next = 0;
  for (Check& check : checks)
    if (check.p) check.p_adjusted = adjusted[next++];
}

using Maker = Check (*)(const Workings&);

struct Entry {
  const char* name;
  Maker make;
  bool needs_order = false;
};

constexpr std::array kAll{
    Entry{"normal-residuals", normal_residuals},
    Entry{"equal-spread", equal_spread},
    Entry{"equal-spread-by-term", equal_spread_by_term},
    Entry{"equal-spread-by-thirds", equal_spread_by_thirds},
    Entry{"equal-spread-any-shape", equal_spread_any_shape},
    Entry{"straightness", straightness},
    Entry{"straightness-by-term", straightness_by_term},
    Entry{"separable-terms", separable_terms},
    Entry{"no-single-row", no_single_row},
    Entry{"independence", independence, true},
    Entry{"independence-at-lags", independence_at_lags, true},
};

}  // namespace

std::vector<Check> run_all(const Workings& workings) {
  std::vector<Check> checks;
  for (const Entry& entry : kAll)
    if (!entry.needs_order || workings.subject.has_order) checks.push_back(entry.make(workings));
  adjust_together(checks);
  for (Check& check : checks) judge(check);
  return checks;
}

std::vector<Check> run_all(const Subject& subject) { return run_all(prepare(subject)); }

std::vector<std::string> names() {
  std::vector<std::string> all;
  for (const Entry& entry : kAll) all.emplace_back(entry.name);
  return all;
}

}  // namespace formsieve::checks

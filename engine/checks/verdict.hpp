// What a check comes to: one rule and one table for all of them (verdict.cpp).
#pragma once

#include "checks/checks.hpp"

#include <limits>
#include <optional>
#include <string_view>

namespace formsieve::checks {

/// Thresholds on a size, each in the size's own units, of its absolute value or of its unevenness (Rule::ratio).
struct Limits {
  double negligible = std::numeric_limits<double>::infinity();  ///< below this nothing matters, whatever p
  double serious = std::numeric_limits<double>::infinity();     ///< from here on broken when p is small
  double gross = std::numeric_limits<double>::infinity();       ///< from here on strained even when p is not small
  double alone = std::numeric_limits<double>::infinity();       ///< beyond this broken whatever p
};

/// One line of the table.
struct Rule {
  std::string_view name;
  bool ratio = false;  ///< the first size is a ratio: 1/2 is as uneven as 2
  bool tested = true;  ///< the size is an estimate that p belongs to; otherwise it is a fact of these rows
  Limits size;
  std::optional<Limits> size2;
};

/// The line of a check; that of a name which is not in the table knows no size, so that p alone strains.
const Rule& rule_of(std::string_view name);

/// The worse of the verdicts of both sizes, each by:
///
///     size            p below kLevel   p not small or none
///     < negligible    holds            holds
///     < serious       strained         holds, strained from `gross` on
///     ≥ serious       broken           the same
///     > alone         broken           broken
///
/// It never gets better when a size grows or p falls.
Verdict verdict(const Rule& rule, double size, std::optional<double> size2, std::optional<double> p_adjusted);

/// Sets verdict, `passes` (not broken) and, where a gross size stands beside a p-value that is not small, a note that
/// the rows are too few to tell. A check without a statistic, or without the p-value that it needs, gets no verdict. A
/// verdict that is broken already stays.
void judge(Check& check);

}  // namespace formsieve::checks

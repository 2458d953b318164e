#include "checks/verdict.hpp"

#include "checks/spread.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace formsieve::checks {

namespace {

constexpr double kNever = std::numeric_limits<double>::infinity();

// Spread, as the ratio of residual standard deviations. With the outer thirds 1.3 apart (1, 1.15, 1.3), intervals from
// one pooled standard deviation that should cover 95 % cover 92 % at the wide end and 98 % at the narrow end, which
// nobody would notice; with 2 (1, 1.5, 2) 87 % and more than 99 %. In analysis of variance, too, a ratio of 2 is the
// common limit (common practice). By chance thirds of 6 rows differ by 3 in 3 of 100 samples (F of 5 and 5 df beyond
// 9).
constexpr Limits kSpread{1.3, 2.0, 3.0, kNever};

// A bend, as the share of the residual variance that squares and cubes would take away. 4 % of it is 2 % of the
// residual standard deviation, what the plan calls a near tie (rank.near_tie); 20 % is 11 %, more than most
// predictors are worth. The gain in R² is the size that is read, but says nothing without what was left to explain.
constexpr Limits kBend{0.04, 0.20, 0.20, kNever};

// Correlation of neighbours. Errors that follow one another with correlation r carry (1 − r)/(1 + r) of the information
// of independent ones: at 0.1 standard errors are 10 % too small, at 0.3 36 %.
constexpr Limits kNeighbours{0.1, 0.3, 0.4, kNever};
// The same over several lags together, as the root of the summed squares beyond chance; 0.4 is reached by chance at 30
// rows in one sample of ten, so it stands for both.
constexpr Limits kLags{0.1, 0.4, 0.4, kNever};

constexpr std::array<Rule, 11> kTable{{
    // Skewness below 0.5 is commonly called none and above 1 marked (common practice); excess kurtosis 1 is that of a
    // t distribution with 10 degrees of freedom, 3 that of 6 degrees or of the Laplace distribution: means and their
    // intervals are safe below, prediction intervals are not beyond.
    {"normal-residuals", false, true, {0.5, 1.0, 1.0, kNever}, Limits{1.0, 3.0, 3.0, kNever}},
    {"equal-spread", true, true, kSpread, {}},
    {"equal-spread-by-term", true, true, kSpread, {}},
    {"equal-spread-by-thirds", true, true, kSpread, {}},
    {"equal-spread-any-shape", true, true, kSpread, {}},
    {"straightness", false, true, {}, kBend},
    {"straightness-by-term", false, true, {}, kBend},
    // Variance inflation of 5 and 10: standard errors 2.2 and 3.2 times those of unrelated terms (common practice). It
    // is a fact of the design, so p has no part. The condition number (second size) sets no verdict: with the intercept
    // it is large for any column far from zero, which harms no prediction.
    {"separable-terms", false, false, {5.0, 5.0, 5.0, 10.0}, {}},
    // Cook's distance (second size): at 1 leaving the row out moves the coefficients to the edge of about a 50 %
    // confidence region (Cook 1977), at 0.5 of about a 20 % one; both limits are common practice. A row that also lies
    // off the others by its p-value strains from 0.1 on and breaks at 0.5. How far predictions move (first size): one
    // residual standard deviation is within what a single new measurement does, two are not. Both are facts of these
    // rows, so a Cook distance beyond 1 breaks whatever p.
    {"no-single-row", false, false, {1.0, 2.0, 2.0, kNever}, Limits{0.1, 0.5, 0.5, 1.0}},
    {"independence", false, true, kNeighbours, {}},
    {"independence-at-lags", false, true, {}, kLags},
}};

constexpr Rule kUnknown{"", false, true, {0.0, kNever, kNever, kNever}, {}};

Verdict verdict_of(const Limits& limits, double size, bool significant) {
  if (size > limits.alone) return Verdict::broken;
  if (significant && size >= limits.serious) return Verdict::broken;
  if (size >= limits.gross || (significant && size >= limits.negligible)) return Verdict::strained;
  return Verdict::holds;
}

}  // namespace

const Rule& rule_of(std::string_view name) {
  const auto* found = std::find_if(kTable.begin(), kTable.end(), [&](const Rule& rule) { return rule.name == name; });
  return found == kTable.end() ? kUnknown : *found;
}

Verdict verdict(const Rule& rule, double size, std::optional<double> size2, std::optional<double> p_adjusted) {
  const bool significant = p_adjusted && *p_adjusted < kLevel;
  Verdict worst = verdict_of(rule.size, rule.ratio ? unevenness(size) : std::abs(size), significant);
  if (rule.size2 && size2) worst = std::max(worst, verdict_of(*rule.size2, std::abs(*size2), significant));
  return worst;
}

void judge(Check& check) {
  const Rule& rule = rule_of(check.name);
  if (!check.verdict && check.statistic && (check.p || !rule.tested)) {
    check.verdict = verdict(rule, check.size, check.size2, check.p_adjusted);
    if (rule.tested && check.verdict == Verdict::strained && *check.p_adjusted >= kLevel)
      check.note +=
          std::string(check.note.empty() ? "" : "; ") + "large, but the rows are too few to tell it from chance";
  }
  check.passes = check.verdict != Verdict::broken;
}

}  // namespace formsieve::checks

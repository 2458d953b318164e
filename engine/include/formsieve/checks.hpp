// Room checks, result types: one assumption check as reported, and what single rows do to a fit. May call: base.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::checks {

/// What a check comes to, from its size and its p-value together.
enum class Verdict { holds, strained, broken };

/// The verdict as it is written.
constexpr std::string_view verdict_word(Verdict verdict) {
  return verdict == Verdict::holds ? "holds" : verdict == Verdict::strained ? "strained" : "broken";
}

/// What a check says of one of the things that it looks at: a term, a design column.
struct CheckPart {
  std::string subject;  ///< "ln(floor_area)"
  std::optional<double> statistic;
  std::optional<double> p;  ///< not adjusted
  double size = 0.0;        ///< as the check's
};

/// One check of one candidate. `statistic`, `p` may be unset where the check has none or the rows cannot support it
/// (then `note` says why).
struct Check {
  std::string name;  ///< "normal-residuals", "equal-spread", "equal-spread-by-term", "straightness", "separable-terms",
                     ///< "no-single-row", "independence"
  std::string method;      ///< "Shapiro–Wilk", "Breusch–Pagan (Koenker), against the fitted value" …
  std::string hypothesis;  ///< the null hypothesis in words
  std::optional<double> statistic;
  std::optional<double> df;   ///< degrees of freedom (numerator), where there are any
  std::optional<double> df2;  ///< denominator, F tests only
  std::optional<double> p;
  std::optional<double> p_adjusted;  ///< Holm 1979 over the checks of this candidate that have a p
  double size = 0.0;                 ///< what a person can judge without n
  std::optional<double> size2;       ///< a second size (excess kurtosis beside skewness)
  std::string size_words;            ///< the sizes with their meaning, "residual skewness 0.4, excess kurtosis 1.1"
  bool passes = true;                ///< false where the verdict is broken
  std::string note;
  std::optional<Verdict> verdict;  ///< unset: the rows could not support the check
  std::vector<CheckPart> parts;    ///< in the order of the terms; empty where the check has none
  std::vector<std::string> mends;  ///< what would mend a check that is strained or broken, from what the search saw
};

/// One row that weighs heavily in a fit.
struct InfluentialRow {
  std::size_t row = 0;         ///< index among the rows in use
  std::size_t line = 0;        ///< of the file, or row of a table without lines, counted from 1
  double leverage = 0.0;       ///< of the whitened problem
  double cook = 0.0;           ///< Cook 1977
  double studentised = 0.0;    ///< externally studentised residual
  double p_bonferroni = 1.0;   ///< of |studentised|, for the largest of n
  double prediction_sd = 0.0;  ///< largest change of any fitted value when the row is left out, in residual sd
  std::string moved_term;      ///< the coefficient that moves most when the row is left out
  double moved_se = 0.0;       ///< that move in standard errors of the coefficient, signed
  /// The listed candidate, by rank, that leads by the plan's criterion when the row is left out; unset where not asked.
  std::optional<std::size_t> leader_without;
};

/// A coefficient of the fit that a few rows cannot move (Yohai 1987), beside that of least squares.
struct RobustCoefficient {
  std::string term;
  double value = 0.0;
  double shift_se = 0.0;  ///< (robust − least squares) / standard error of least squares
};

struct Influence {
  double largest_leverage = 0.0;
  std::size_t n_downweighted = 0;         ///< rows that the robust fit gives less than half of their weight
  std::vector<InfluentialRow> rows;       ///< most influential first, few
  std::vector<RobustCoefficient> robust;  ///< in the order of the coefficients; empty when the robust fit failed
  std::vector<std::string> words;  ///< sentences: which rows matter, which coefficients rest on a handful of rows

  bool empty() const noexcept { return rows.empty() && robust.empty() && words.empty(); }
};

}  // namespace formsieve::checks

// Room checks, result types: one assumption check as reported. May call: base.
#pragma once

#include <optional>
#include <string>

namespace formsieve::checks {

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
  bool passes = true;
  std::string note;
};

}  // namespace formsieve::checks

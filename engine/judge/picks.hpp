// The named lines of a shortlist.
#pragma once

#include "judge/judge.hpp"

#include <cstddef>
#include <optional>
#include <span>
#include <string_view>

namespace formsieve::judge {

/// True when the decimal number `a` is below `b`; any length, leading zeros allowed.
bool number_below(std::string_view a, std::string_view b);

/// Coefficients with the intercept, q − 1: known before the full refit.
std::size_t n_coefficients(const Candidate& candidate);

/// Where the named lines stand in a ranked list; unset where no candidate qualifies.
struct Picks {
  std::optional<std::size_t> best;         ///< the first admitted, if its criterion has a value
  std::optional<std::size_t> lowest_cv;    ///< lowest own-units CV RMSE
  std::optional<std::size_t> lowest_aic;   ///< over all, with or without a CV RMSE
  std::optional<std::size_t> recommended;  ///< lowest AIC with CV RMSE ≤ (1 + near_tie) · lowest
  std::optional<std::size_t> simplest;     ///< fewest coefficients with CV RMSE ≤ lowest + its standard error
};

/// Picks among the candidates that `admits` says yes to (empty: all); asked in the order of each pick until the first
/// yes. Ties by lower CV RMSE (simplest, recommended), then by candidate number. Cost O(candidates · log candidates).
Picks find_picks(std::span<const Candidate> ranked, Criterion criterion, double near_tie, const Admits& admits = {});

/// Sentences about picks that differ, near ties, and candidates without a CV RMSE.
std::vector<std::string> remarks(std::span<const Candidate> ranked, const Picks& picks, double near_tie);

}  // namespace formsieve::judge

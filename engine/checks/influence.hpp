// What single rows do to a fit: which weigh most, and what leaving each of them out would change.
#pragma once

#include "checks/checks.hpp"

#include <formsieve/fit.hpp>

#include <Eigen/Core>

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::checks {

struct Workings;

/// Rows that are listed at most, and how many of them by Cook's distance alone. A reader follows up a handful.
inline constexpr std::size_t kMostInfluential = 5;
inline constexpr std::size_t kByCook = 3;
/// A row is far from the others in the predictors when its leverage exceeds this many times the average p/n (Velleman &
/// Welsch 1981; twice the average would find a row in twenty of any sample) …
inline constexpr double kFarLeverage = 3.0;
/// … and this: below 0.2 a row cannot pull a fit far however it lies (Huber 1981, section 7.2).
inline constexpr double kRiskyLeverage = 0.2;
/// A coefficient rests on a handful of rows when a fit that few rows cannot move puts it this many standard errors
/// away.
inline constexpr double kNotableShift = 1.0;

/// A fit that a few rows cannot move, as the room fit makes it (fit::robust_fit).
struct Insensitive {
  Eigen::VectorXd coefficients;  ///< [p] in the order of the design
  std::size_t n_downweighted = 0;
  std::string method;  ///< "MM, bisquare"
};

/// Whether a leverage is beyond both limits. `average`: p/n.
bool is_far(double leverage, double average);

/// The largest rows by Cook's distance, those whose studentised residual is significant by Bonferroni at kLevel, and
/// the one of largest leverage when is_far says so; most influential (by Cook, full leverage before all)
/// first. All leave-one-out figures are exact (checks/deletion.hpp). `coefficients` [p] name the columns, intercept
/// first; A row has line 0 where the subject knows no lines. leader_without is left unset. Empty
/// where there are no residuals to judge (exact fit, no degrees of freedom, rank). Cost O(n k²), most of it one QR.
Influence influence(const Subject& subject, std::span<const fit::Coefficient> coefficients,
                    const std::optional<Insensitive>& robust = std::nullopt);
Influence influence(const Workings& workings, std::span<const fit::Coefficient> coefficients,
                    const std::optional<Insensitive>& robust);

/// Both run_all and influence, with one QR between them.
struct Findings {
  std::vector<Check> checks;
  Influence influence;
};
Findings examine(const Subject& subject, std::span<const fit::Coefficient> coefficients,
                 const std::optional<Insensitive>& robust = std::nullopt);

/// Sentences for a reader: what the rows listed do, and which coefficients the robust fit puts elsewhere. `method` is
/// that of the robust fit.
std::vector<std::string> influence_words(const Influence& influence, std::size_t n, std::size_t p,
                                         const std::string& method);

}  // namespace formsieve::checks

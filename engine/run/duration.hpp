// Durations as people write them, the other way round. Private to room run.
#pragma once

#include <string>

namespace formsieve::run {

/// Longest budget that is taken at its word: ten years. Longer ones are slips, and would overflow a clock's counter.
inline constexpr double kLongestBudgetSeconds = 10.0 * 366.0 * 86400.0;

/// "8h", "90m", "45s" or a fraction of seconds; parse_duration reads back the same double.
std::string duration_text(double seconds);

/// The shortest decimal digits that read back as the same double, as TOML writes them: "0.02", "1e-09", "-0.0", "inf".
std::string number_text(double value);

}  // namespace formsieve::run

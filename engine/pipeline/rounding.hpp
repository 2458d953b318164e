// Figures of the screen as they are reported: cut to digits that are the same on every machine and instruction set.
#pragma once

#include <optional>

namespace formsieve::pipeline {

/// Digits that the walk's arithmetic leaves the same on every instruction set: it is exact to about 1e-12.
inline constexpr int kReportedDigits = 9;
/// Losses are differences of such figures; beyond these decimals nobody can act on them.
inline constexpr double kLossStep_rel = 1e-6;
inline constexpr double kCriterionStep = 1e-4;

/// The double nearest to the value's first kReportedDigits digits in decimal.
double to_digits(double value);

/// The nearest multiple of the step, a power of ten below 1.
double to_step(double value, double step);

/// Unset for what is not finite.
std::optional<double> finite(double value);

}  // namespace formsieve::pipeline

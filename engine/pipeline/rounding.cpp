#include "pipeline/rounding.hpp"

#include <array>
#include <charconv>
#include <cmath>

namespace formsieve::pipeline {

double to_digits(double value) {
  std::array<char, 32> text{};
  const auto written =
      std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::scientific, kReportedDigits - 1);
  double rounded = value;
  std::from_chars(text.data(), written.ptr, rounded);
  return rounded;
}

// dividing by the inverse gives the double nearest to the decimal
double to_step(double value, double step) { return std::round(value / step) / std::round(1.0 / step); }

std::optional<double> finite(double value) {
  return std::isfinite(value) ? std::optional<double>(value) : std::nullopt;
}

}  // namespace formsieve::pipeline

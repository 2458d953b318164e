// Printed equations, as a mathematician writes them.
#pragma once

#include <formsieve/judge.hpp>

#include <string>

namespace formsieve::report {

/// Digits of a coefficient in a printed equation: enough that the rounding moves no prediction of ordinary data by more
/// than about 1e-4 of the response's spread; the coefficients themselves are listed in full.
inline constexpr int kEquationDigits = 5;

/// "ln(energy_kwh) = 3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill)" from the candidate's response, terms and
/// coefficients.
std::string equation(const judge::Candidate& candidate);

/// Its right-hand side alone.
std::string linear_predictor(const judge::Candidate& candidate);

/// A number with at most `digits` significant digits, the minus sign as "−", no trailing zeros.
std::string number_text(double value, int digits);

}  // namespace formsieve::report

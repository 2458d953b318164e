#include "report/equation.hpp"

#include <cmath>
#include <cstdio>

namespace formsieve::report {

std::string number_text(double value, int digits) {
  char text[64];
  std::snprintf(text, sizeof text, "%.*g", digits, std::abs(value));
  std::string shown = text;
  // "1.2e-05" → "1.2·10^−5": the same writing everywhere, and no letter that could be taken for a variable
  if (const auto e = shown.find('e'); e != std::string::npos) {
    const int exponent = std::stoi(shown.substr(e + 1));
    shown = shown.substr(0, e) + "·10^" + (exponent < 0 ? "−" : "") + std::to_string(std::abs(exponent));
  }
  return (value < 0.0 ? "−" : "") + shown;
}

std::string linear_predictor(const judge::Candidate& candidate) {
  if (candidate.coefficients.empty()) return "";
  std::string text = number_text(candidate.coefficients.front().value, kEquationDigits);
  for (std::size_t i = 1; i < candidate.coefficients.size(); ++i) {
    const fit::Coefficient& coefficient = candidate.coefficients[i];
    text += coefficient.value < 0.0 ? " − " : " + ";
    text += number_text(std::abs(coefficient.value), kEquationDigits) + "·" + coefficient.term;
  }
  return text;
}

std::string equation(const judge::Candidate& candidate) {
  return forms::label(candidate.response, candidate.response_column) + " = " + linear_predictor(candidate);
}

}  // namespace formsieve::report

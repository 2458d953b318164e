#include "report/equation.hpp"

#include <cmath>
#include <cstdio>
#include <vector>

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

namespace {

/// Labels of the design columns in order; an indicator in Iverson's brackets, since "cooling = air" after a coefficient
/// would read as an equation.
std::vector<std::string> column_texts(const judge::Candidate& candidate) {
  std::vector<std::string> texts;
  for (const auto& term : candidate.terms)
    for (std::size_t k = 0; k < forms::n_columns(term.form); ++k) {
      const std::string label = forms::label(term.form, term.column, k);
      texts.push_back(term.form.kind == forms::Kind::levels ? "[" + label + "]" : label);
    }
  return texts;
}

}  // namespace

std::string linear_predictor(const judge::Candidate& candidate) {
  if (candidate.coefficients.empty()) return "";
  const std::vector<std::string> texts = column_texts(candidate);
  std::string text = number_text(candidate.coefficients.front().value, kEquationDigits);
  for (std::size_t i = 1; i < candidate.coefficients.size(); ++i) {
    const fit::Coefficient& coefficient = candidate.coefficients[i];
    text += coefficient.value < 0.0 ? " − " : " + ";
    text += number_text(std::abs(coefficient.value), kEquationDigits) + "·" + texts[i - 1];
  }
  return text;
}

std::string equation(const judge::Candidate& candidate) {
  return forms::label(candidate.response, candidate.response_column) + " = " + linear_predictor(candidate);
}

}  // namespace formsieve::report

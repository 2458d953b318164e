// Python 3, with nothing but its module math.
#include "report/code_comments.hpp"
#include "report/code_forms.hpp"
#include "report/code_languages.hpp"
#include "report/code_names.hpp"

#include <cstdio>

namespace formsieve::report {

namespace {

std::string python_number(double value) {
  const std::string text = shortest(value);
  return text.find_first_of(".e") == std::string::npos ? text + ".0" : text;
}

std::string python_text(const std::string& text) {
  std::string literal = "\"";
  for (const char c : text) {
    char escaped[8];
    if (static_cast<unsigned char>(c) < 0x20 || c == 0x7F) {
      std::snprintf(escaped, sizeof escaped, "\\x%02x", static_cast<unsigned>(c));
      literal += escaped;
    } else {
      if (c == '"' || c == '\\') literal += '\\';
      literal += c;
    }
  }
  return literal + "\"";
}

constexpr Dialect kPython = {
    {"math.log(@1)", "math.log10(@1)", "math.exp(@1)", "math.pow(@1, @2)", "math.sqrt(@1)",
     // math.cbrt is younger than many a Python in use.
     "math.copysign(abs(@1) ** (1.0 / 3.0), @1)", "math.sinh(@1)", "math.cosh(@1)", "math.asinh(@1)", "math.atan(@1)",
     "math.sin(@1)", "abs(@1)", "math.expm1(@1)", "math.log1p(@1)", "formsieve_mean_over(@1, @2)"},
    "math.nan",
    "math.isfinite(@1)",
    "(@1 == @2)",
    "(@2 if @1 else @3)",
    {"(", " and ", ")"},
    {"(", " or ", ")"},
    python_number,
    python_text,
    true};

std::string averaging(const model::Model& model) {
  return "    def formsieve_inverse(z):\n        return " +
         written(inverse_formula(model.response, variable("z")), kPython) +
         "\n\n    def formsieve_mean_over(residuals, eta):\n"
         "        return sum([formsieve_inverse(eta + e) for e in residuals]) / len(residuals)\n\n";
}

std::string residuals_text(const MeanFormula& formula) {
  std::string text;
  for (std::size_t i = 0; i < formula.residuals.size(); ++i) {
    text += "    " + residuals_name(i) + " = [";
    for (std::size_t j = 0; j < formula.residuals[i].size(); ++j)
      text += (j == 0 ? "\n        " : j % 6 == 0 ? ",\n        " : ", ") + python_number(formula.residuals[i][j]);
    text += "]\n";
  }
  return text;
}

std::string reading(const std::vector<Input>& inputs) {
  std::string text =
      "    def formsieve_number(value):\n        try:\n            return float(value)\n"
      "        except (TypeError, ValueError, OverflowError):\n            return math.nan\n\n";
  for (const Input& input : inputs)
    if (!input.is_text) text += "    " + input.name + " = formsieve_number(" + input.name + ")\n";
  return text;
}

std::string body(const model::Model& model, const std::vector<Input>& inputs, const MeanFormula& mean) {
  return "    try:\n        if not " + written(all_of({defined_formula(model, inputs)}), kPython) +
         ":\n            return math.nan\n        eta = " + written(eta_formula(model, inputs), kPython) +
         "\n        mean = " + written(mean.mean, kPython) +
         "\n        return mean if math.isfinite(eta) and math.isfinite(mean) else math.nan\n"
         "    except (ValueError, OverflowError, ZeroDivisionError):\n        return math.nan\n";
}

}  // namespace

Result<std::string> code_in_python(const CodeRequest& request) {
  std::vector<Input> inputs = inputs_of(request.model);
  name_inputs(inputs);
  const auto mean = mean_formula(request.model, variable("eta"), kPython.has_residuals, request.smearing_factor);
  if (!mean) return mean.error();
  std::vector<Input> function = {{request.set.response, "", false}};
  name_inputs(function);
  std::vector<std::string> notes = mean->notes;
  notes.push_back("A missing input is None or math.nan; no value is math.nan.");
  std::string parameters;
  for (const Input& input : inputs) parameters += (parameters.empty() ? "" : ", ") + input.name;
  std::string text = commented(comment_lines(request.set, request.model, inputs, notes), "# ");
  text += "import math\n\n\ndef mean_of_" + function.front().name + "(" + parameters + "):\n";
  if (!mean->residuals.empty()) text += averaging(request.model) + residuals_text(*mean) + "\n";
  return text + reading(inputs) + body(request.model, inputs, *mean);
}

}  // namespace formsieve::report

// C99, which C++ reads too.
#include "report/code_comments.hpp"
#include "report/code_forms.hpp"
#include "report/code_languages.hpp"
#include "report/code_names.hpp"

#include <cstdio>

namespace formsieve::report {

namespace {

/// Whole numbers need a point, or division would be that of whole numbers.
std::string c_number(double value) {
  const std::string text = shortest(value);
  return text.find_first_of(".e") == std::string::npos ? text + ".0" : text;
}

/// Bytes of UTF-8 as they are; control characters as three octal digits; no trigraphs.
std::string c_text(const std::string& text) {
  std::string literal = "\"";
  for (const char c : text) {
    char escaped[8];
    if (static_cast<unsigned char>(c) < 0x20 || c == 0x7F) {
      std::snprintf(escaped, sizeof escaped, "\\%03o", static_cast<unsigned>(c));
      literal += escaped;
    } else {
      if (c == '"' || c == '\\' || c == '?') literal += '\\';
      literal += c;
    }
  }
  return literal + "\"";
}

constexpr Dialect kC = {{"log(@1)", "log10(@1)", "exp(@1)", "pow(@1, @2)", "sqrt(@1)", "cbrt(@1)", "sinh(@1)",
                         "cosh(@1)", "asinh(@1)", "atan(@1)", "sin(@1)", "fabs(@1)", "expm1(@1)", "log1p(@1)",
                         "formsieve_mean_over(@1, sizeof @1 / sizeof *@1, @2)"},
                        "NAN",
                        "isfinite(@1)",
                        "(@1 != NULL && strcmp(@1, @2) == 0)",
                        "(@1 ? @2 : @3)",
                        {"(", " && ", ")"},
                        {"(", " || ", ")"},
                        c_number,
                        c_text,
                        true};

std::string averaging(const model::Model& model) {
  return "static double formsieve_inverse(double z) {\n  return " +
         written(inverse_formula(model.response, variable("z")), kC) +
         ";\n}\n\n"
         "static double formsieve_mean_over(const double *residuals, size_t n, double eta) {\n"
         "  double sum = 0.0;\n  size_t i;\n"
         "  for (i = 0; i < n; ++i) sum += formsieve_inverse(eta + residuals[i]);\n"
         "  return sum / (double)n;\n}\n\n";
}

std::string residuals_text(const MeanFormula& formula) {
  std::string text;
  for (std::size_t i = 0; i < formula.residuals.size(); ++i) {
    text += "  static const double " + residuals_name(i) + "[] = {";
    for (std::size_t j = 0; j < formula.residuals[i].size(); ++j)
      text += (j == 0 ? "\n    " : j % 6 == 0 ? ",\n    " : ", ") + c_number(formula.residuals[i][j]);
    text += "};\n";
  }
  return text;
}

std::string parameters_text(const std::vector<Input>& inputs) {
  std::string text;
  for (const Input& input : inputs)
    text += (text.empty() ? "" : ", ") + std::string(input.is_text ? "const char *" : "double ") + input.name;
  return text.empty() ? "void" : text;
}

}  // namespace

Result<std::string> code_in_c(const CodeRequest& request) {
  std::vector<Input> inputs = inputs_of(request.model);
  name_inputs(inputs);
  const auto mean = mean_formula(request.model, variable("eta"), kC.has_residuals, request.smearing_factor);
  if (!mean) return mean.error();
  std::vector<Input> function = {{request.set.response, "", false}};
  name_inputs(function);
  std::vector<std::string> notes = mean->notes;
  notes.push_back("A missing number is NAN, a missing text NULL; no value is NAN. Link with -lm.");
  std::string text = commented(comment_lines(request.set, request.model, inputs, notes), "// ");
  text += "#include <math.h>\n#include <stddef.h>\n#include <string.h>\n\n";
  if (!mean->residuals.empty()) text += averaging(request.model);
  text += "double mean_of_" + function.front().name + "(" + parameters_text(inputs) + ") {\n" + residuals_text(*mean);
  text += "  double eta, mean;\n  if (!(" + written(defined_formula(request.model, inputs), kC) + ")) return NAN;\n";
  text += "  eta = " + written(eta_formula(request.model, inputs), kC) + ";\n";
  text += "  mean = " + written(mean->mean, kC) + ";\n";
  return text + "  return isfinite(eta) && isfinite(mean) ? mean : NAN;\n}\n";
}

}  // namespace formsieve::report

// Two formulas for a row of cells: the form-scale prediction, and from it the mean.
#include "report/code_comments.hpp"
#include "report/code_languages.hpp"
#include "report/code_names.hpp"

namespace formsieve::report {

namespace {

/// What the common spreadsheets take as one formula, and as one text within it.
constexpr std::size_t kLongestFormula = 8192;
constexpr std::size_t kLongestText = 255;

/// "A", …, "Z", "AA", … of a column counted from 0.
std::string letters(std::size_t column) {
  std::string text;
  for (std::size_t rest = column + 1; rest > 0; rest = (rest - 1) / 26)
    text.insert(text.begin(), static_cast<char>('A' + (rest - 1) % 26));
  return text;
}

/// Control characters by their number: a cell that is pasted ends at a tab or a new line.
std::string sheet_text(const std::string& text) {
  std::string literal = "\"";
  for (const char c : text) {
    if (static_cast<unsigned char>(c) < 0x20) {
      literal += "\"&CHAR(" + std::to_string(static_cast<int>(c)) + ")&\"";
    } else {
      if (c == '"') literal += c;
      literal += c;
    }
  }
  return literal + "\"";
}

constexpr Dialect kSheet = {
    {"LN(@1)", "LOG10(@1)", "EXP(@1)", "POWER(@1,@2)", "SQRT(@1)", "(SIGN(@1)*POWER(ABS(@1),1/3))", "SINH(@1)",
     "COSH(@1)", "ASINH(@1)", "ATAN(@1)", "SIN(@1)", "ABS(@1)", "(2*EXP((@1)/2)*SINH((@1)/2))",
     "IF(ABS(@1)<0.5,2*ATANH((@1)/(2+(@1))),LN(1+(@1)))", ""},
    "NA()",
    "ISNUMBER(@1)",
    "EXACT(@1,@2)",
    "IF(@1,@2,@3)",
    {"AND(", ",", ")"},
    {"OR(", ",", ")"},
    shortest,
    sheet_text,
    false};

/// A heading that no spreadsheet takes for a formula.
std::string heading(const std::string& text) {
  const std::string line = one_line_text(text);
  const bool looks_like_one = !line.empty() && std::string("=+-@").find(line.front()) != std::string::npos;
  return looks_like_one ? " " + line : line;
}

Status check_lengths(const std::string& eta, const std::string& mean, const model::Model& model) {
  bool fits = eta.size() <= kLongestFormula && mean.size() <= kLongestFormula;
  for (const model::Term& term : model.terms) {
    for (const auto* levels : {&term.form.levels, &term.form.pooled})
      for (const std::string& level : *levels) fits = fits && level.size() <= kLongestText;
  }
  if (fits) return {};
  return Error{ErrorKind::usage, "the formula of this candidate is too long for a cell of a spreadsheet", "",
               "give --as sql, --as c or --as python"};
}

std::string pasted(const std::vector<Input>& inputs, const std::string& response, const std::string& eta,
                   const std::string& mean) {
  std::string headings, blanks;
  for (const Input& input : inputs) {
    headings += heading(input.column) + "\t";
    blanks += "\t";
  }
  return headings + "form scale\tmean of " + one_line_text(response) + "\n" + blanks + eta + "\t" + mean + "\n";
}

}  // namespace

Result<std::string> code_in_spreadsheet(const CodeRequest& request) {
  std::vector<Input> inputs = inputs_of(request.model);
  for (std::size_t i = 0; i < inputs.size(); ++i) inputs[i].name = letters(i) + "2";
  const std::string eta_cell = letters(inputs.size()) + "2";
  const auto mean = mean_formula(request.model, variable(eta_cell), kSheet.has_residuals, request.smearing_factor);
  if (!mean) return mean.error();
  const std::string eta = "=IFERROR(IF(" + written(defined_formula(request.model, inputs), kSheet) + "," +
                          written(eta_formula(request.model, inputs), kSheet) + ",\"\"),\"\")";
  const std::string of_mean = "=IFERROR(IF(ISNUMBER(" + eta_cell + ")," + written(mean->mean, kSheet) + ",\"\"),\"\")";
  if (Status status = check_lengths(eta, of_mean, request.model); !status) return status.error();
  std::vector<std::string> notes = mean->notes;
  notes.push_back(
      "Paste the two lines below at cell A1 and copy row 2 down: the inputs stand in their columns, the "
      "form-scale prediction in " +
      eta_cell + ", the mean in " + letters(inputs.size() + 1) + "2. A cell without a value is blank.");
  notes.push_back(
      "Function names are the English ones, separated by commas; some spreadsheets keep 15 digits of a number.");
  return commented(comment_lines(request.set, request.model, inputs, notes), "# ") +
         pasted(inputs, request.set.response, eta, of_mean);
}

}  // namespace formsieve::report

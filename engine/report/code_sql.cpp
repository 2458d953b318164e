// Standard SQL with the functions of SQL:2016, as SQLite and PostgreSQL have them.
#include "report/code_comments.hpp"
#include "report/code_languages.hpp"

namespace formsieve::report {

namespace {

/// With an exponent, or some databases would count in decimals of few digits.
std::string sql_number(double value) {
  const std::string text = shortest(value);
  return text.find('e') == std::string::npos ? text + "e0" : text;
}

std::string quoted(const std::string& text, char quote) {
  std::string literal(1, quote);
  for (const char c : text) {
    if (c == quote) literal += c;
    literal += c;
  }
  return literal + quote;
}

std::string sql_text(const std::string& text) { return quoted(text, '\''); }
std::string sql_name(const std::string& text) { return quoted(text, '"'); }

constexpr Dialect kSql = {
    {"LN(@1)", "LOG10(@1)", "EXP(@1)", "POWER(@1, @2)", "SQRT(@1)", "(SIGN(@1) * POWER(ABS(@1), 1e0 / 3e0))",
     "SINH(@1)", "COSH(@1)", "ASINH(@1)", "ATAN(@1)", "SIN(@1)", "ABS(@1)",
     // exp(t) − 1 and ln(1 + t) without the cancellation
     "(2e0 * EXP((@1) / 2e0) * SINH((@1) / 2e0))",
     "CASE WHEN ABS(@1) < 5e-1 THEN 2e0 * ATANH((@1) / (2e0 + (@1))) ELSE LN(1e0 + (@1)) END", ""},
    "NULL",
    "@1 IS NOT NULL",
    "@1 = @2",
    "CASE WHEN @1 THEN @2 ELSE @3 END",
    {"(", " AND ", ")"},
    {"(", " OR ", ")"},
    sql_number,
    sql_text,
    false};

/// True of finite numbers alone; also false of text in a column of numbers, which sorts behind them.
std::string is_finite(const std::string& name) {
  return name + " BETWEEN -1.7976931348623157e308 AND 1.7976931348623157e308";
}

std::string inputs_text(const std::vector<Input>& inputs) {
  std::string text = "WITH formsieve_inputs AS (\n  SELECT t.*";
  for (const Input& input : inputs) {
    const std::string column = "t." + sql_name(input.column);
    text += ",\n    ";
    text += input.is_text ? column
                          : "CASE WHEN " + is_finite(column) + " THEN CAST(" + column + " AS DOUBLE PRECISION) END";
    text += " AS " + input.name;
  }
  return text + "\n  FROM your_table AS t),\n";
}

}  // namespace

Result<std::string> code_in_sql(const CodeRequest& request) {
  std::vector<Input> inputs = inputs_of(request.model);
  for (std::size_t i = 0; i < inputs.size(); ++i) inputs[i].name = "formsieve_x" + std::to_string(i + 1);
  const auto mean = mean_formula(request.model, variable("formsieve_eta"), kSql.has_residuals, request.smearing_factor);
  if (!mean) return mean.error();
  std::vector<std::string> notes = mean->notes;
  notes.push_back(
      "Put the name of your table in place of your_table. Columns of numbers must have a numeric type; no "
      "value is NULL. Texts are compared as the database compares "
      "them. No column of your table may have a name that begins with formsieve_.");
  std::string text = commented(comment_lines(request.set, request.model, inputs, notes), "-- ");
  text += inputs_text(inputs);
  text += "formsieve_scale AS (\n  SELECT i.*,\n    CASE WHEN " +
          written(defined_formula(request.model, inputs), kSql) + "\n    THEN " +
          written(eta_formula(request.model, inputs), kSql) + " END AS formsieve_eta\n  FROM formsieve_inputs AS i),\n";
  text += "formsieve_means AS (\n  SELECT s.*,\n    CASE WHEN " + is_finite("formsieve_eta") + "\n    THEN " +
          written(mean->mean, kSql) + " END AS formsieve_mean\n  FROM formsieve_scale AS s)\n";
  return text + "SELECT m.*, CASE WHEN " + is_finite("formsieve_mean") + " THEN formsieve_mean END AS " +
         sql_name("mean of " + request.set.response) + "\nFROM formsieve_means AS m;\n";
}

}  // namespace formsieve::report

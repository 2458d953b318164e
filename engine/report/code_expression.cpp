#include "report/code_expression.hpp"

#include <charconv>
#include <cmath>
#include <utility>

namespace formsieve::report {

namespace {

Expression node(Operation operation, std::vector<Expression> parts) { return {operation, std::move(parts), 0.0, {}}; }

Expression joined(Operation operation, std::vector<Expression> conditions) {
  if (conditions.size() == 1) return std::move(conditions.front());
  return node(operation, std::move(conditions));
}

/// How tightly a written node holds together.
enum class Binding { condition, sum, product, atom };

struct Written {
  std::string text;
  Binding binding;
};

Written write(const Expression& expression, const Dialect& dialect);

std::string at_least(const Written& part, Binding binding) {
  return part.binding >= binding ? part.text : "(" + part.text + ")";
}

std::string filled(std::string_view pattern, const std::vector<std::string>& parts) {
  std::string text;
  for (std::size_t i = 0; i < pattern.size(); ++i) {
    if (pattern[i] == '@') {
      text += parts.at(static_cast<std::size_t>(pattern[++i] - '1'));
    } else {
      text += pattern[i];
    }
  }
  return text;
}

std::vector<std::string> written_parts(const Expression& expression, const Dialect& dialect) {
  std::vector<std::string> parts;
  for (const Expression& part : expression.parts) parts.push_back(write(part, dialect).text);
  return parts;
}

/// "a + b": the left part may be of the same binding, the right part must bind tighter.
Written infix(const Expression& expression, const Dialect& dialect, const char* sign, Binding binding) {
  const auto tighter = static_cast<Binding>(static_cast<int>(binding) + 1);
  const std::string left = at_least(write(expression.parts[0], dialect), binding);
  return {left + sign + at_least(write(expression.parts[1], dialect), tighter), binding};
}

Written joint(const Expression& expression, const Dialect& dialect, const Joint& words) {
  std::string text(words.open);
  bool first = true;
  for (const std::string& part : written_parts(expression, dialect)) {
    if (!first) text += words.between;
    text += part;
    first = false;
  }
  return {text + std::string(words.close), Binding::atom};
}

Written write(const Expression& expression, const Dialect& dialect) {
  const auto pattern = [&](std::string_view words) {
    return Written{filled(words, written_parts(expression, dialect)), Binding::atom};
  };
  switch (expression.operation) {
    case Operation::number:
      return {dialect.number(expression.value), std::signbit(expression.value) ? Binding::condition : Binding::atom};
    case Operation::variable:
      return {expression.name, Binding::atom};
    case Operation::undefined:
      return {std::string(dialect.undefined), Binding::atom};
    case Operation::add:
      return infix(expression, dialect, " + ", Binding::sum);
    case Operation::subtract:
      return infix(expression, dialect, " - ", Binding::sum);
    case Operation::multiply:
      return infix(expression, dialect, " * ", Binding::product);
    case Operation::divide:
      return infix(expression, dialect, " / ", Binding::product);
    case Operation::less:
      return {infix(expression, dialect, " < ", Binding::sum).text, Binding::condition};
    case Operation::less_or_equal:
      return {infix(expression, dialect, " <= ", Binding::sum).text, Binding::condition};
    case Operation::is_number:
      return pattern(dialect.is_number);
    case Operation::is_text:
      return {filled(dialect.is_text, {write(expression.parts[0], dialect).text, dialect.text(expression.name)}),
              Binding::atom};
    case Operation::all:
      return joint(expression, dialect, dialect.all);
    case Operation::any:
      return joint(expression, dialect, dialect.any);
    case Operation::choose:
      return pattern(dialect.choose);
    case Operation::mean_over:
      return {filled(dialect.functions[kFunctions - 1], {expression.name, write(expression.parts[0], dialect).text}),
              Binding::atom};
    default:
      return pattern(dialect.functions[static_cast<std::size_t>(expression.operation)]);
  }
}

}  // namespace

Expression number(double value) { return {Operation::number, {}, value, {}}; }
Expression variable(const std::string& name) { return {Operation::variable, {}, 0.0, name}; }
Expression undefined() { return {}; }
Expression call(Operation function, Expression a) { return node(function, {std::move(a)}); }
Expression call(Operation function, Expression a, Expression b) { return node(function, {std::move(a), std::move(b)}); }
Expression operator+(Expression a, Expression b) { return node(Operation::add, {std::move(a), std::move(b)}); }
Expression operator-(Expression a, Expression b) { return node(Operation::subtract, {std::move(a), std::move(b)}); }
Expression operator*(Expression a, Expression b) { return node(Operation::multiply, {std::move(a), std::move(b)}); }
Expression operator/(Expression a, Expression b) { return node(Operation::divide, {std::move(a), std::move(b)}); }
Expression less(Expression a, Expression b) { return node(Operation::less, {std::move(a), std::move(b)}); }
Expression less_or_equal(Expression a, Expression b) {
  return node(Operation::less_or_equal, {std::move(a), std::move(b)});
}
Expression is_number(Expression a) { return node(Operation::is_number, {std::move(a)}); }
Expression is_text(Expression a, const std::string& text) { return {Operation::is_text, {std::move(a)}, 0.0, text}; }
Expression all_of(std::vector<Expression> conditions) { return joined(Operation::all, std::move(conditions)); }
Expression any_of(std::vector<Expression> conditions) { return joined(Operation::any, std::move(conditions)); }
Expression choose(Expression condition, Expression where_true, Expression where_false) {
  return node(Operation::choose, {std::move(condition), std::move(where_true), std::move(where_false)});
}

std::string written(const Expression& expression, const Dialect& dialect) { return write(expression, dialect).text; }

std::string shortest(double value) {
  char text[32];
  return {text, std::to_chars(text, text + sizeof text, value).ptr};
}

}  // namespace formsieve::report

// A formula as a tree, and how the tree is written in one language. Private to room report.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::report {

/// What a node of a formula is. The functions come first: their number is the place in Dialect::functions.
enum class Operation {
  ln,
  log10,
  exp,
  power,  ///< base, exponent
  sqrt,
  cube_root,
  sinh,
  cosh,
  asinh,
  atan,
  sin,
  absolute,
  exp_minus_1,
  log_1_plus,
  mean_over,  ///< name: which residuals; part: η. Only where Dialect::has_residuals
  number,
  variable,
  undefined,  ///< no value
  add,
  subtract,
  multiply,
  divide,
  less,           ///< a < b
  less_or_equal,  ///< a ≤ b
  is_number,      ///< a finite number is there
  is_text,        ///< name of the second part: a text; true where the first part is that text
  all,            ///< and
  any,            ///< or
  choose,         ///< condition, value where it holds, value where it does not
};
inline constexpr std::size_t kFunctions = static_cast<std::size_t>(Operation::mean_over) + 1;

struct Expression {
  Operation operation = Operation::undefined;
  std::vector<Expression> parts = {};
  double value = 0.0;     ///< of a number
  std::string name = {};  ///< of a variable or a text
};

Expression number(double value);
Expression variable(const std::string& name);
Expression undefined();
Expression call(Operation function, Expression a);
Expression call(Operation function, Expression a, Expression b);
Expression operator+(Expression a, Expression b);
Expression operator-(Expression a, Expression b);
Expression operator*(Expression a, Expression b);
Expression operator/(Expression a, Expression b);
Expression less(Expression a, Expression b);
Expression less_or_equal(Expression a, Expression b);
Expression is_number(Expression a);
Expression is_text(Expression a, const std::string& text);
Expression all_of(std::vector<Expression> conditions);  ///< at least one
Expression any_of(std::vector<Expression> conditions);  ///< at least one
Expression choose(Expression condition, Expression where_true, Expression where_false);

/// How several conditions are joined: "AND(a,b)" or "(a && b)".
struct Joint {
  std::string_view open, between, close;
};

/// The words of a language. In a pattern @1, @2 and @3 stand for the parts, written so that no parentheses are needed
/// around them where they stand between commas or parentheses.
struct Dialect {
  std::string_view functions[kFunctions];
  std::string_view undefined;
  std::string_view is_number, is_text, choose;
  Joint all, any;
  std::string (*number)(double);            ///< a literal that reads back to the same double
  std::string (*text)(const std::string&);  ///< a literal
  bool has_residuals;                       ///< mean_over can be written
};

/// The formula in that language. Sums and products are evaluated from left to right as in the tree.
std::string written(const Expression& expression, const Dialect& dialect);

/// Fewest digits that read back to the same double: "0.25", "1e-05", "3".
std::string shortest(double value);

}  // namespace formsieve::report

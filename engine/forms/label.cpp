#include <formsieve/forms.hpp>

#include "forms/text.hpp"

#include <cctype>
#include <cmath>

namespace formsieve::forms {

namespace {

std::string parenthesised(const std::string& inner) { return "(" + inner + ")"; }

/// A name that needs no parentheses beside an operator.
bool is_word(const std::string& text) {
  for (const char c : text) {
    const auto byte = static_cast<unsigned char>(c);
    if (!(std::isalnum(byte) || c == '_' || c == '.' || byte >= 0x80)) return false;
  }
  return !text.empty() && !std::isdigit(static_cast<unsigned char>(text[0])) && text.find("−") == std::string::npos;
}

/// u written out: x, x + 1, x − 1946, 101 − x, −x.
std::string argument_text(const Form& form, const std::string& column) {
  if (form.reflect) {
    const double anchor = *form.reflect + form.shift;
    return (anchor == 0.0 ? "−" : number_text(anchor) + " − ") + column;
  }
  if (form.shift == 0.0) return column;
  return column + (form.shift > 0.0 ? " + " : " − ") + number_text(std::fabs(form.shift));
}

/// u as one factor: the bare column, or the argument in parentheses.
std::string factor_text(const Form& form, const std::string& column) {
  const bool bare = !form.reflect && form.shift == 0.0 && is_word(column);
  return bare ? column : parenthesised(argument_text(form, column));
}

/// u as a term of its own, as in 0.84·(x + 1).
std::string linear_text(const Form& form, const std::string& column) {
  const bool bare = !form.reflect && form.shift == 0.0;
  return bare ? column : parenthesised(argument_text(form, column));
}

std::string exponent_text(double p) { return p < 0.0 ? parenthesised(number_text(p)) : number_text(p); }

std::string list_text(const std::vector<double>& numbers) {
  std::string text;
  for (const double number : numbers) text += (text.empty() ? "" : ", ") + number_text(number);
  return text;
}

/// A one-column form of the argument `u`, whose factor is `atom`.
std::string function_text(Kind kind, const std::vector<double>& parameters, const std::string& u,
                          const std::string& atom) {
  switch (kind) {
    case Kind::square:
      return atom + "²";
    case Kind::cube:
      return atom + "³";
    case Kind::sqrt:
      return "√(" + u + ")";
    case Kind::cube_root:
      return "∛(" + u + ")";
    case Kind::ln:
      return "ln(" + u + ")";
    case Kind::log10:
      return "log10(" + u + ")";
    case Kind::reciprocal:
      return "1/" + atom;
    case Kind::reciprocal_sqrt:
      return "1/√(" + u + ")";
    case Kind::reciprocal_square:
      return "1/" + atom + "²";
    case Kind::exp:
      return "exp(" + u + ")";
    case Kind::asinh:
      return "asinh(" + u + ")";
    case Kind::logit:
      return "logit(" + u + ")";
    case Kind::arcsine_sqrt:
      return "arcsin(√(" + u + "))";
    case Kind::power:
      return atom + "^" + exponent_text(parameters[0]);
    case Kind::box_cox: {
      const double l = parameters[0];
      if (l == 0.0) return "ln(" + u + ")";
      const std::string power = atom + "^" + exponent_text(l);
      return (l > 0.0 ? parenthesised(power + " − 1") : parenthesised("1 − " + power)) + "/" +
             number_text(std::fabs(l));
    }
    case Kind::yeo_johnson:
      return "YJ(" + u + "; " + number_text(parameters[0]) + ")";
    default:
      return atom;
  }
}

/// u^p as a fractional polynomial uses it, the usual powers by their own signs.
std::string power_text(double p, const std::string& u, const std::string& atom) {
  if (p == 0.0) return function_text(Kind::ln, {}, u, atom);
  if (p == 1.0) return atom;
  if (p == 2.0) return function_text(Kind::square, {}, u, atom);
  if (p == 3.0) return function_text(Kind::cube, {}, u, atom);
  if (p == 0.5) return function_text(Kind::sqrt, {}, u, atom);
  if (p == -1.0) return function_text(Kind::reciprocal, {}, u, atom);
  if (p == -0.5) return function_text(Kind::reciprocal_sqrt, {}, u, atom);
  if (p == -2.0) return function_text(Kind::reciprocal_square, {}, u, atom);
  return function_text(Kind::power, {p}, u, atom);
}

std::string fractional_polynomial_text(const Form& form, std::size_t index, const std::string& u,
                                       const std::string& atom) {
  const double p = form.parameters[index];
  if (index == 0 || p != form.parameters[0]) return power_text(p, u, atom);
  if (p == 0.0) return "(ln(" + u + "))²";
  const std::string power = power_text(p, u, atom);
  return (p < 0.0 ? parenthesised(power) : power) + "·ln(" + u + ")";
}

/// The p-th root; a root sign for odd whole p, since an odd root of a negative number is meant.
std::string root_text(double p, const std::string& atom) {
  constexpr const char* kDigits[] = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
  if (p == 3.0) return "∛" + atom;
  const bool odd = p > 1.0 && std::fmod(p, 2.0) == 1.0;
  if (!odd) return atom + "^(1/" + exponent_text(p) + ")";
  std::string degree;
  for (const char digit : number_text(p))
    if (digit >= '0' && digit <= '9') degree += kDigits[digit - '0'];
  return degree + "√" + atom;
}

/// The argument of the inverse before shift and reflection are undone: f⁻¹ written around `eta`.
std::string inverse_function_text(const Form& form, const std::string& eta) {
  const std::string atom = parenthesised(eta);
  const double p = form.parameters.empty() ? 0.0 : form.parameters[0];
  switch (form.kind) {
    case Kind::identity:
      return eta;
    case Kind::square:
      return "√" + atom;
    case Kind::cube:
      return "∛" + atom;
    case Kind::sqrt:
      return atom + "²";
    case Kind::cube_root:
      return atom + "³";
    case Kind::ln:
      return "exp" + atom;
    case Kind::log10:
      return "10^" + atom;
    case Kind::reciprocal:
      return "1/" + atom;
    case Kind::reciprocal_sqrt:
      return "1/" + atom + "²";
    case Kind::reciprocal_square:
      return "1/√" + atom;
    case Kind::exp:
      return "ln" + atom;
    case Kind::asinh:
      return "sinh" + atom;
    case Kind::logit:
      return "1/(1 + exp(−" + atom + "))";
    case Kind::arcsine_sqrt:
      return "(sin" + atom + ")²";
    case Kind::power:
      return root_text(p, atom);
    case Kind::box_cox:
      if (p == 0.0) return "exp" + atom;
      return "(1 " + std::string(p > 0.0 ? "+ " : "− ") + number_text(std::fabs(p)) + "·" + atom + ")^(" +
             (p > 0.0 ? "" : "−") + "1/" + number_text(std::fabs(p)) + ")";
    case Kind::yeo_johnson:
      return "YJ⁻¹(" + eta + "; " + number_text(p) + ")";
    default:
      return {};
  }
}

}  // namespace

std::string label(const Form& form, const std::string& column, std::size_t index) {
  const std::string u = argument_text(form, column);
  const std::string atom = factor_text(form, column);
  switch (form.kind) {
    case Kind::identity:
      return linear_text(form, column);
    case Kind::quadratic:
      return index == 0 ? linear_text(form, column) : atom + "²";
    case Kind::fractional_polynomial:
      return fractional_polynomial_text(form, index, u, atom);
    case Kind::spline:
      if (index == 0) return linear_text(form, column);
      return "spline" + std::to_string(index) + "(" + u + "; " + list_text(form.parameters) + ")";
    case Kind::levels:
      return column + " = " + form.levels[index + 1];
    default:
      return function_text(form.kind, form.parameters, u, atom);
  }
}

std::string term_name(const Form& form, const std::string& column) {
  const std::string u = argument_text(form, column);
  switch (form.kind) {
    case Kind::quadratic:
      return "quadratic(" + u + ")";
    case Kind::fractional_polynomial:
    case Kind::spline:
      return std::string(kind_name(form.kind)) + "(" + u + "; " + list_text(form.parameters) + ")";
    case Kind::levels:
      return "levels(" + column + ")";
    default:
      return label(form, column);
  }
}

std::string inverse_label(const Form& form, const std::string& argument) {
  std::string inner = inverse_function_text(form, argument);
  if (!form.reflect && form.shift == 0.0) return inner;
  if (form.kind == Kind::identity && !is_word(argument)) inner = parenthesised(argument);
  if (form.reflect) {
    const double anchor = *form.reflect + form.shift;
    return (anchor == 0.0 ? "−" : number_text(anchor) + " − ") + inner;
  }
  return inner + (form.shift > 0.0 ? " − " : " + ") + number_text(std::fabs(form.shift));
}

}  // namespace formsieve::forms

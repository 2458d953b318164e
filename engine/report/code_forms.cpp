#include "report/code_forms.hpp"

#include "forms/dispatch.hpp"

#include <cmath>

namespace formsieve::report {

namespace {

using forms::Kind;

Expression squared(const Expression& a) { return a * a; }
Expression cubed(const Expression& a) { return a * a * a; }
Expression negative(const Expression& a) { return number(-1.0) * a; }

/// u = x + shift, or anchor − x.
Expression argument(const forms::Form& form, const Expression& x) {
  if (form.reflect) return number(*form.reflect + form.shift) - x;
  if (form.shift == 0.0) return x;
  return form.shift < 0.0 ? x - number(-form.shift) : x + number(form.shift);
}

Kind kind_of_power(double p) {
  if (p == 1.0) return Kind::identity;
  if (p == 2.0) return Kind::square;
  if (p == 3.0) return Kind::cube;
  if (p == 0.5) return Kind::sqrt;
  if (p == -1.0) return Kind::reciprocal;
  if (p == -0.5) return Kind::reciprocal_sqrt;
  if (p == -2.0) return Kind::reciprocal_square;
  return Kind::power;
}

/// Where nothing is to be divided by a λ that may be as small as it likes.
Expression is_tiny(const Expression& t) { return less(call(Operation::absolute, t), number(forms::kTinyExponent)); }

/// (w^λ − 1)/λ as forms::scaled_power has it, from ln w; `plainly`: where the power loses no digits.
Expression scaled_power(const Expression& w, const Expression& ln_w, double lambda, const Expression& plainly) {
  const Expression t = number(lambda) * ln_w;
  const Expression by_power = (call(Operation::power, w, number(lambda)) - number(1.0)) / number(lambda);
  const Expression formula = choose(plainly, by_power, call(Operation::exp_minus_1, t) / number(lambda));
  if (std::fabs(lambda) >= forms::kTinyExponent) return formula;
  return choose(is_tiny(t), ln_w * (number(1.0) + number(0.5) * t), formula);
}

Expression box_cox(const Expression& u, double lambda) {
  const Expression ln_u = call(Operation::ln, u);
  const Expression size = call(Operation::absolute, number(lambda) * ln_u);
  const Expression inside = scaled_power(u, ln_u, lambda, less(number(forms::kLargeExponent), size));
  if (lambda < 0.0) return inside;
  return choose(less(number(0.0), u), inside, number(-1.0 / lambda));  // the edge itself: ln 0 is nowhere written
}

/// Box–Cox of 1 + v, v ≥ 0.
Expression yeo_johnson_half(const Expression& v, double lambda) {
  const Expression ln_w = call(Operation::log_1_plus, v);
  if (lambda == 0.0) return ln_w;
  const Expression large = less(number(forms::kLargeExponent), call(Operation::absolute, number(lambda) * ln_w));
  return scaled_power(number(1.0) + v, ln_w, lambda, all_of({less(number(1.0), v), large}));
}

Expression yeo_johnson(const Expression& u, double lambda) {
  return choose(less_or_equal(number(0.0), u), yeo_johnson_half(u, lambda),
                negative(yeo_johnson_half(negative(u), 2.0 - lambda)));
}

/// asin(√u) = 2·atan(√u/(1 + √(1 − u))), which keeps its digits near 1.
Expression arcsine_sqrt(const Expression& u) {
  const Expression below = number(1.0) + call(Operation::sqrt, number(1.0) - u);
  return number(2.0) * call(Operation::atan, call(Operation::sqrt, u) / below);
}

/// A one-column form of its argument, inside its support.
Expression function_formula(Kind kind, double parameter, const Expression& u) {
  const auto root = [&] { return call(Operation::sqrt, u); };
  switch (kind) {
    case Kind::square:
      return squared(u);
    case Kind::cube:
      return cubed(u);
    case Kind::sqrt:
      return root();
    case Kind::cube_root:
      return call(Operation::cube_root, u);
    case Kind::ln:
      return call(Operation::ln, u);
    case Kind::log10:
      return call(Operation::log10, u);
    case Kind::reciprocal:
      return number(1.0) / u;
    case Kind::reciprocal_sqrt:
      return number(1.0) / root();
    case Kind::reciprocal_square:
      return number(1.0) / u / u;
    case Kind::exp:
      return call(Operation::exp, u);
    case Kind::asinh:
      return call(Operation::asinh, u);
    case Kind::logit:
      return call(Operation::ln, u) - call(Operation::log_1_plus, negative(u));
    case Kind::arcsine_sqrt:
      return arcsine_sqrt(u);
    case Kind::power:
      return call(Operation::power, u, number(parameter));
    case Kind::box_cox:
      return box_cox(u, parameter);
    case Kind::yeo_johnson:
      return yeo_johnson(u, parameter);
    default:
      return u;
  }
}

/// u^p of a fractional polynomial, ln u for p = 0; times ln u when the power has been used before.
Expression fractional_polynomial(const forms::Form& form, std::size_t index, const Expression& u) {
  const double p = form.parameters[index];
  const Expression ln_u = call(Operation::ln, u);
  const Expression power = p == 0.0 ? ln_u : function_formula(kind_of_power(p), p, u);
  return index == 1 && p == form.parameters[0] ? power * ln_u : power;
}

/// As forms::SplineColumn, where the mathematics is.
Expression spline_column(const std::vector<double>& knots, std::size_t j, const Expression& u) {
  const forms::SplineColumn column(knots, j);
  const auto beyond = [&](double knot) { return knot < 0.0 ? u + number(-knot) : u - number(knot); };
  const double d = column.last - column.knot, h = column.last - column.before_last;
  const Expression right = number(d * (d - h)) * (number(d + h) + number(3.0) * beyond(column.last));
  const Expression first = cubed(beyond(column.knot));
  const Expression middle = first - number(column.ratio) * cubed(beyond(column.before_last));
  const Expression scale = number(column.squared_range);
  return choose(less_or_equal(u, number(column.knot)), number(0.0),
                choose(less_or_equal(number(column.last), u), right / scale,
                       choose(less(number(column.before_last), u), middle / scale, first / scale)));
}

/// The texts that count as level `index`: those of the pool in place of its name.
std::vector<std::string> texts_of_level(const forms::Form& form, std::size_t index) {
  const bool is_pool = !form.pooled.empty() && index + 1 == form.levels.size();
  return is_pool ? form.pooled : std::vector<std::string>{form.levels[index]};
}

Expression is_level(const forms::Form& form, std::size_t first, std::size_t last, const Expression& x) {
  std::vector<Expression> conditions;
  for (std::size_t index = first; index < last; ++index)
    for (const std::string& text : texts_of_level(form, index)) conditions.push_back(is_text(x, text));
  return any_of(std::move(conditions));
}

forms::Interval support_of(const forms::Form& form) {
  if (form.kind == Kind::fractional_polynomial) return forms::kPositive;
  if (!forms::is_function(form.kind)) return forms::kWholeLine;
  return forms::visit_function(form, [](const auto& function) { return function.support; });
}

/// (1 + λz)^(1/λ), with the digits that expm1 and log1p keep where λz is small; the logarithm of it.
Expression log_of_scaled_power(const Expression& z, double lambda) {
  const Expression s = number(lambda) * z;
  const Expression formula = call(Operation::log_1_plus, s) / number(lambda);
  if (std::fabs(lambda) >= forms::kTinyExponent) return formula;
  return choose(is_tiny(s), z * (number(1.0) - number(0.5) * s), formula);
}

Expression yeo_johnson_half_inverse(const Expression& z, double lambda) {
  if (lambda == 0.0) return call(Operation::exp_minus_1, z);
  return call(Operation::exp_minus_1, log_of_scaled_power(z, lambda));
}

Expression power_inverse(const Expression& z, double p) {
  const auto root = [&](const Expression& size) { return call(Operation::power, size, number(1.0 / p)); };
  const bool takes_negative = p > 0.0 && std::fmod(p, 2.0) == 1.0;
  if (!takes_negative) return root(z);
  return choose(less(z, number(0.0)), negative(root(negative(z))), root(z));
}

Expression logit_inverse(const Expression& z) {
  const Expression e = call(Operation::exp, negative(call(Operation::absolute, z)));
  const Expression below = number(1.0) + e;
  return choose(less_or_equal(number(0.0), z), number(1.0) / below, e / below);
}

/// The inverse inside the image.
Expression inside_inverse(Kind kind, double parameter, const Expression& z) {
  switch (kind) {
    case Kind::square:
      return call(Operation::sqrt, z);
    case Kind::cube:
      return call(Operation::cube_root, z);
    case Kind::sqrt:
      return squared(z);
    case Kind::cube_root:
      return cubed(z);
    case Kind::ln:
      return call(Operation::exp, z);
    case Kind::log10:
      return call(Operation::power, number(10.0), z);
    case Kind::reciprocal:
      return number(1.0) / z;
    case Kind::reciprocal_sqrt:
      return number(1.0) / z / z;
    case Kind::reciprocal_square:
      return number(1.0) / call(Operation::sqrt, z);
    case Kind::exp:
      return call(Operation::ln, z);
    case Kind::asinh:
      return call(Operation::sinh, z);
    case Kind::logit:
      return logit_inverse(z);
    case Kind::arcsine_sqrt:
      return squared(call(Operation::sin, z));
    case Kind::power:
      return power_inverse(z, parameter);
    case Kind::box_cox:
      return call(Operation::exp, log_of_scaled_power(z, parameter));
    case Kind::yeo_johnson:
      return choose(less_or_equal(number(0.0), z), yeo_johnson_half_inverse(z, parameter),
                    negative(yeo_johnson_half_inverse(negative(z), 2.0 - parameter)));
    default:
      return z;
  }
}

double parameter_of(const forms::Form& form) { return form.parameters.empty() ? 0.0 : form.parameters.front(); }

}  // namespace

Kind plain_kind(const forms::Form& form) {
  if (form.kind == Kind::box_cox && parameter_of(form) == 0.0) return Kind::ln;
  return form.kind == Kind::power ? kind_of_power(parameter_of(form)) : form.kind;
}

std::vector<Expression> column_formulas(const forms::Form& form, const Expression& x) {
  const Expression u = argument(form, x);
  std::vector<Expression> columns;
  for (std::size_t index = 0; index < forms::n_columns(form); ++index) {
    if (form.kind == Kind::levels) {
      columns.push_back(choose(is_level(form, index + 1, index + 2, x), number(1.0), number(0.0)));
    } else if (form.kind == Kind::fractional_polynomial) {
      columns.push_back(fractional_polynomial(form, index, u));
    } else if (form.kind == Kind::spline) {
      columns.push_back(index == 0 ? u : spline_column(form.parameters, index - 1, u));
    } else if (form.kind == Kind::quadratic) {
      columns.push_back(index == 0 ? u : squared(u));
    } else {
      columns.push_back(function_formula(plain_kind(form), parameter_of(form), u));
    }
  }
  return columns;
}

Expression defined_where(const forms::Form& form, const Expression& x) {
  if (form.kind == Kind::levels) return is_level(form, 0, form.levels.size(), x);
  const forms::Interval support = support_of(form);
  const Expression u = argument(form, x), lower = number(support.lower), upper = number(support.upper);
  std::vector<Expression> conditions = {is_number(x)};
  if (std::isfinite(support.lower))
    conditions.push_back(support.lower_closed ? less_or_equal(lower, u) : less(lower, u));
  if (std::isfinite(support.upper))
    conditions.push_back(support.upper_closed ? less_or_equal(u, upper) : less(u, upper));
  return all_of(std::move(conditions));
}

Expression inverse_formula(const forms::Form& form, const Expression& z) {
  const forms::Form plain{form.kind, form.parameters};
  const forms::Interval image = forms::inverse_domain(plain);
  const auto edge = [&](double at, bool closed) { return closed ? number(forms::inverse(plain, at)) : undefined(); };
  Expression formula = inside_inverse(plain_kind(plain), parameter_of(plain), z);
  if (std::isfinite(image.upper))
    formula = choose(less_or_equal(number(image.upper), z), edge(image.upper, image.upper_closed), formula);
  if (std::isfinite(image.lower))
    formula = choose(less_or_equal(z, number(image.lower)), edge(image.lower, image.lower_closed), formula);
  return formula;
}

Expression own_units(const forms::Form& response, const Expression& u) {
  if (response.reflect) return number(*response.reflect + response.shift) - u;
  if (response.shift == 0.0) return u;
  return response.shift < 0.0 ? u + number(-response.shift) : u - number(response.shift);
}

}  // namespace formsieve::report

#include "forms/equivalence.hpp"

#include <algorithm>
#include <cmath>
#include <set>
#include <string>
#include <vector>

namespace formsieve::forms {

namespace {

/// The span of {1, columns of a form} by its simplest description. The argument is u = sign·x + offset.
struct ColumnSpace {
  enum class Family {
    constant,
    linear,
    quadratic,
    power,
    ln,
    exp,
    asinh,
    logit,
    arcsine,
    yeo_johnson,
    two_powers,
    spline,
    levels
  };
  Family family;
  std::vector<double> parameters = {};
  int sign = 1;
  double offset = 0.0;
  std::set<std::string> levels = {}, pooled = {};  ///< which is the reference does not matter
};

using Family = ColumnSpace::Family;

/// The column −x + c of an odd or mirrored family spans what x − c does.
void mirror(ColumnSpace& space, double centre) {
  if (space.sign > 0) return;
  space.sign = 1;
  space.offset = centre - space.offset;
}

ColumnSpace of_power(double p, int sign, double offset) {
  if (p == 0.0) return {.family = Family::constant};
  if (p == 1.0) return {.family = Family::linear};
  ColumnSpace space{.family = Family::power, .parameters = {p}, .sign = sign, .offset = offset};
  // A whole power of −u is that of u but for the sign; the cube root is odd too, and power(1/3) is it where u ≥ 0.
  if (p == std::floor(p) || p == 1.0 / 3.0) mirror(space, 0.0);
  return space;
}

ColumnSpace of_logarithm(int sign, double offset) { return {.family = Family::ln, .sign = sign, .offset = offset}; }

ColumnSpace of_box_cox(double lambda, int sign, double offset) {
  return lambda == 0.0 ? of_logarithm(sign, offset) : of_power(lambda, sign, offset);
}

/// With facts, a column whose u has one sign turns Yeo-Johnson into Box-Cox of 1 + |u|.
ColumnSpace of_yeo_johnson(double lambda, int sign, double offset, const ColumnFacts* facts) {
  if (lambda == 1.0) return {.family = Family::linear};
  if (facts) {
    const double at_min = sign * facts->min + offset, at_max = sign * facts->max + offset;
    if (std::min(at_min, at_max) >= 0.0) return of_box_cox(lambda, sign, offset + 1.0);
    if (std::max(at_min, at_max) <= 0.0) return of_box_cox(2.0 - lambda, -sign, 1.0 - offset);
  }
  // The function for λ at u is minus the one for 2 − λ at −u.
  if (sign < 0) return {.family = Family::yeo_johnson, .parameters = {2.0 - lambda}, .sign = 1, .offset = -offset};
  return {.family = Family::yeo_johnson, .parameters = {lambda}, .sign = 1, .offset = offset};
}

ColumnSpace of_two_powers(std::vector<double> powers, int sign, double offset) {
  std::sort(powers.begin(), powers.end());
  if (powers == std::vector<double>{1.0, 2.0}) return {.family = Family::quadratic};
  return {.family = Family::two_powers, .parameters = std::move(powers), .sign = sign, .offset = offset};
}

/// A natural spline space depends on where its knots stand on x alone.
ColumnSpace of_spline(std::vector<double> knots, int sign, double offset) {
  for (double& knot : knots) knot = sign * (knot - offset);
  std::sort(knots.begin(), knots.end());
  return {.family = Family::spline, .parameters = std::move(knots)};
}

ColumnSpace of_levels(const Form& form) {
  ColumnSpace space{.family = Family::levels};
  const auto n_single = static_cast<std::ptrdiff_t>(form.levels.size()) - (form.pooled.empty() ? 0 : 1);
  space.levels.insert(form.levels.begin(), form.levels.begin() + n_single);
  space.pooled.insert(form.pooled.begin(), form.pooled.end());
  return space;
}

ColumnSpace space_of(const Form& form, const ColumnFacts* facts) {
  const int sign = form.reflect ? -1 : 1;
  const double offset = form.reflect.value_or(0.0) + form.shift;
  const double p = form.parameters.empty() ? 0.0 : form.parameters[0];
  ColumnSpace space{.family = Family::linear, .sign = sign, .offset = offset};
  switch (form.kind) {
    case Kind::identity:
      return {.family = Family::linear};
    case Kind::square:
      return of_power(2.0, sign, offset);
    case Kind::cube:
      return of_power(3.0, sign, offset);
    case Kind::sqrt:
      return of_power(0.5, sign, offset);
    case Kind::cube_root:
      return of_power(1.0 / 3.0, sign, offset);
    case Kind::reciprocal:
      return of_power(-1.0, sign, offset);
    case Kind::reciprocal_sqrt:
      return of_power(-0.5, sign, offset);
    case Kind::reciprocal_square:
      return of_power(-2.0, sign, offset);
    case Kind::power:
      return of_power(p, sign, offset);
    case Kind::box_cox:
      return of_box_cox(p, sign, offset);
    case Kind::yeo_johnson:
      return of_yeo_johnson(p, sign, offset, facts);
    case Kind::ln:
    case Kind::log10:
      return of_logarithm(sign, offset);
    case Kind::quadratic:
      return {.family = Family::quadratic};
    case Kind::fractional_polynomial:
      return of_two_powers(form.parameters, sign, offset);
    case Kind::spline:
      return of_spline(form.parameters, sign, offset);
    case Kind::levels:
      return of_levels(form);
    case Kind::exp:
      space.family = Family::exp;
      space.offset = 0.0;  // exp(x + c) is a multiple of exp(x)
      return space;
    case Kind::asinh:
      space.family = Family::asinh;
      mirror(space, 0.0);
      return space;
    case Kind::logit:
    case Kind::arcsine_sqrt:
      space.family = form.kind == Kind::logit ? Family::logit : Family::arcsine;
      mirror(space, 1.0);  // f(1 − u) is a constant minus f(u)
      return space;
  }
  return space;
}

/// Two numbers that differ by rounding alone, so that a shift written as a sum and as its result agree.
bool same_number(double a, double b) {
  constexpr double kRounding = 1e-13;
  return a == b || std::fabs(a - b) <= kRounding * std::fmax(std::fabs(a), std::fabs(b));
}

bool same_space(const ColumnSpace& a, const ColumnSpace& b) {
  return a.family == b.family && a.sign == b.sign && same_number(a.offset, b.offset) &&
         std::equal(a.parameters.begin(), a.parameters.end(), b.parameters.begin(), b.parameters.end(), same_number) &&
         a.levels == b.levels && a.pooled == b.pooled;
}

// Smaller is simpler. A kind counts least, then whether it has a parameter, then shift and reflection, then columns.
constexpr int kOfParameter = 50, kOfShift = 100, kOfReflection = 200, kOfColumn = 1000;

/// Rank of a kind, in the order in which a modeller would reach for it.
int kind_rank(Kind kind) {
  switch (kind) {
    case Kind::identity:
      return 0;
    case Kind::sqrt:
      return 1;
    case Kind::ln:
      return 2;
    case Kind::reciprocal:
      return 3;
    case Kind::square:
      return 4;
    case Kind::log10:
      return 5;
    case Kind::cube_root:
      return 6;
    case Kind::cube:
      return 7;
    default:
      return 8 + static_cast<int>(kind);
  }
}

}  // namespace

bool equivalent(const Form& a, const Form& b) { return same_space(space_of(a, nullptr), space_of(b, nullptr)); }

bool equivalent_on(const Form& a, const Form& b, const ColumnFacts& facts) {
  return same_space(space_of(a, &facts), space_of(b, &facts)) || equivalent(a, b);
}

int complexity(const Form& form) {
  const bool one_parameter = form.kind >= Kind::power && form.kind <= Kind::yeo_johnson;
  return kind_rank(form.kind) + (one_parameter ? kOfShift + kOfParameter : 0) + (form.shift != 0.0 ? kOfShift : 0) +
         (form.reflect ? kOfReflection : 0) + kOfColumn * (static_cast<int>(n_columns(form)) - 1);
}

}  // namespace formsieve::forms

// From a Form to the struct that computes it: the one place where kinds are told apart for computing.
#pragma once

#include "forms/columns.hpp"
#include "forms/families.hpp"
#include "forms/functions.hpp"

#include <cassert>
#include <cstddef>

namespace formsieve::forms {

/// Calls `visitor` with u^p; the usual powers take the plain function, which is faster and has the same bits as its
/// kind.
template <class Visitor>
auto visit_power(double p, Visitor&& visitor) {
  if (p == 1.0) return visitor(Identity{});
  if (p == 2.0) return visitor(Square{});
  if (p == 3.0) return visitor(Cube{});
  if (p == 0.5) return visitor(Sqrt{});
  if (p == -1.0) return visitor(Reciprocal{});
  if (p == -0.5) return visitor(ReciprocalSqrt{});
  if (p == -2.0) return visitor(ReciprocalSquare{});
  return visitor(Power{p});
}

/// True for the kinds that are one function of u and have a derivative and an inverse.
inline bool is_function(Kind kind) { return kind <= Kind::yeo_johnson; }

/// Calls `visitor` with the function of a form for which is_function() holds.
template <class Visitor>
auto visit_function(const Form& form, Visitor&& visitor) {
  assert(is_function(form.kind));
  assert(form.kind < Kind::power || form.parameters.size() == 1);
  switch (form.kind) {
    case Kind::square:
      return visitor(Square{});
    case Kind::cube:
      return visitor(Cube{});
    case Kind::sqrt:
      return visitor(Sqrt{});
    case Kind::cube_root:
      return visitor(CubeRoot{});
    case Kind::ln:
      return visitor(Ln{});
    case Kind::log10:
      return visitor(Log10{});
    case Kind::reciprocal:
      return visitor(Reciprocal{});
    case Kind::reciprocal_sqrt:
      return visitor(ReciprocalSqrt{});
    case Kind::reciprocal_square:
      return visitor(ReciprocalSquare{});
    case Kind::exp:
      return visitor(Exp{});
    case Kind::asinh:
      return visitor(Asinh{});
    case Kind::logit:
      return visitor(Logit{});
    case Kind::arcsine_sqrt:
      return visitor(ArcsineSqrt{});
    case Kind::power:
      return visit_power(form.parameters[0], visitor);
    case Kind::box_cox:
      return visitor(BoxCox{form.parameters[0]});
    case Kind::yeo_johnson:
      return visitor(YeoJohnson{form.parameters[0]});
    default:
      return visitor(Identity{});
  }
}

/// Column `index` of a fractional polynomial: u^p, or u^p·ln u when the power has been used before; u^0 is ln u.
template <class Visitor>
auto visit_fractional_polynomial(const Form& form, std::size_t index, Visitor&& visitor) {
  const double p = form.parameters[index];
  const bool repeated = index == 1 && p == form.parameters[0];
  const auto with = [&](auto function) {
    return repeated ? visitor(TimesLog<decltype(function)>{function})
                    : visitor(OnPositive<decltype(function)>{function});
  };
  return p == 0.0 ? with(Ln{}) : visit_power(p, with);
}

/// Calls `visitor` with the function of u (of the level code, for levels) that makes column `index` of any form.
template <class Visitor>
auto visit_column(const Form& form, std::size_t index, Visitor&& visitor) {
  switch (form.kind) {
    case Kind::quadratic:
      return index == 0 ? visitor(Identity{}) : visitor(Square{});
    case Kind::fractional_polynomial:
      return visit_fractional_polynomial(form, index, visitor);
    case Kind::spline:
      return index == 0 ? visitor(Identity{}) : visitor(SplineColumn{form.parameters, index - 1});
    case Kind::levels:
      return visitor(LevelIndicator{static_cast<double>(index + 1), static_cast<double>(form.levels.size())});
    default:
      return visit_function(form, visitor);
  }
}

}  // namespace formsieve::forms

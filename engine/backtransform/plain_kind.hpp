// Private to room backtransform: a response form as the plain function that it equals, and the way from its argument u
// to own units.
#pragma once

#include <formsieve/forms.hpp>

namespace formsieve::backtransform {

/// The plain form whose inverse is the same function of z: Box–Cox 0 is ln, power ½ is sqrt.
forms::Kind plain_kind(const forms::Form& form);

/// ln or log10 of u, whatever their name, reflection or shift.
bool is_logarithm(const forms::Form& form);

/// The form without reflection and shift: its inverse gives u.
forms::Form plain_form(const forms::Form& form);

/// Own units = offset + sign·u.
struct WayBack {
  explicit WayBack(const forms::Form& form);
  double operator()(double u) const { return offset + sign * u; }
  double offset, sign;
};

}  // namespace formsieve::backtransform

// The argument u of a form and the way back to the raw value.
#pragma once

#include <formsieve/forms.hpp>

namespace formsieve::forms {

/// u = x + shift
struct DirectArgument {
  double shift;
  static constexpr int kSign = 1;
  double operator()(double x) const noexcept { return x + shift; }
  double back(double u) const noexcept { return u - shift; }
};

/// u = anchor − x, the anchor being reflect + shift
struct ReflectedArgument {
  double anchor;
  static constexpr int kSign = -1;
  double operator()(double x) const noexcept { return anchor - x; }
  double back(double u) const noexcept { return anchor - u; }
};

/// Calls `visitor` with the argument of `form`, as one of the two types above.
template <class Visitor>
auto with_argument(const Form& form, Visitor&& visitor) {
  if (form.reflect) return visitor(ReflectedArgument{*form.reflect + form.shift});
  return visitor(DirectArgument{form.shift});
}

}  // namespace formsieve::forms

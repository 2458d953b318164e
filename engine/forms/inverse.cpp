#include <formsieve/forms.hpp>

#include "forms/argument.hpp"
#include "forms/dispatch.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::forms {

namespace {

/// Shape of any form; those of several columns are not one-to-one and keep their support alone.
Shape shape_of(const Form& form) {
  if (is_function(form.kind)) return visit_function(form, [](const auto& function) -> Shape { return function; });
  const Interval support = form.kind == Kind::fractional_polynomial ? kPositive : kWholeLine;
  return {support, support, kWholeLine, 0};
}

/// The raw value at the edge `u_edge` of a set of u, `inward` +1 for a lower edge of x, −1 for an upper one. Rounding
/// of u can put the exact edge on the wrong side: a closed edge must be the last double that belongs to the set, an
/// open one the first that does not. Where that fails the edge is sought between two points that are beyond doubt.
template <class Argument>
double raw_edge(const Argument& argument, const Interval& set, double u_edge, bool closed, int inward) {
  const double x = argument.back(u_edge);
  if (!std::isfinite(x)) return x;
  const auto belongs = [&](double at) { return set.contains(argument(at)); };
  const double inner = closed ? x : std::nextafter(x, inward * kInfinity);
  const double outer = closed ? std::nextafter(x, -inward * kInfinity) : x;
  if (belongs(inner) && !belongs(outer)) return x;
  const double beyond_doubt = 4.0 * std::numeric_limits<double>::epsilon() * std::fmax(std::fabs(x), std::fabs(u_edge));
  double inside = x + inward * beyond_doubt;
  double outside = x - inward * beyond_doubt;
  for (double middle = x; middle != inside && middle != outside; middle = inside + 0.5 * (outside - inside))
    (belongs(middle) ? inside : outside) = middle;
  return closed ? inside : outside;
}

/// The raw x whose u lies in `set`.
Interval raw_interval(const Form& form, const Interval& set) {
  return with_argument(form, [&](auto argument) -> Interval {
    const bool rising = argument.kSign > 0;
    const auto [low, low_closed] =
        rising ? std::pair(set.lower, set.lower_closed) : std::pair(set.upper, set.upper_closed);
    const auto [high, high_closed] =
        rising ? std::pair(set.upper, set.upper_closed) : std::pair(set.lower, set.lower_closed);
    return {raw_edge(argument, set, low, low_closed, 1), raw_edge(argument, set, high, high_closed, -1), low_closed,
            high_closed};
  });
}

/// u for z, an argument beyond a closed edge of the image moved to it; NaN otherwise and for a constant function.
template <class Function>
double inverse_argument(const Function& function, double z) {
  const Interval& image = function.image;
  if (function.sign == 0) return kNaN;
  if (z > image.lower && z < image.upper) return function.inverse(z);
  if (z <= image.lower && image.lower_closed) return function.inverse(image.lower);
  if (z >= image.upper && image.upper_closed) return function.inverse(image.upper);
  return kNaN;
}

}  // namespace

Interval domain(const Form& form) { return raw_interval(form, shape_of(form).support); }

Interval response_domain(const Form& form) { return raw_interval(form, shape_of(form).branch); }

bool invertible(const Form& form) { return shape_of(form).sign != 0; }

int monotone_sign(const Form& form) { return form.reflect ? -shape_of(form).sign : shape_of(form).sign; }

Interval inverse_domain(const Form& form) { return shape_of(form).image; }

double inverse(const Form& form, double z) {
  double x = kNaN;
  inverse_column(form, {&z, 1}, {&x, 1});
  return x;
}

void inverse_column(const Form& form, std::span<const double> z, std::span<double> out) {
  assert(z.size() == out.size());
  if (!is_function(form.kind)) return static_cast<void>(std::fill(out.begin(), out.end(), kNaN));
  with_argument(form, [&](auto argument) {
    visit_function(form, [&](const auto& function) {
      const auto local = function;  // a copy that the stores to `out` cannot alias
      for (std::size_t i = 0; i < z.size(); ++i) out[i] = argument.back(inverse_argument(local, z[i]));
    });
  });
}

}  // namespace formsieve::forms

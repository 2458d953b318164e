#include "backtransform/plain_kind.hpp"

namespace formsieve::backtransform {

using forms::Kind;

Kind plain_kind(const forms::Form& form) {
  const double parameter = form.parameters.empty() ? 0.0 : form.parameters.front();
  if (form.kind == Kind::box_cox && parameter == 0.0) return Kind::ln;
  if (form.kind != Kind::power) return form.kind;
  if (parameter == 1.0) return Kind::identity;
  if (parameter == 0.5) return Kind::sqrt;
  if (parameter == -1.0) return Kind::reciprocal;
  return form.kind;
}

bool is_logarithm(const forms::Form& form) {
  const Kind kind = plain_kind(form);
  return kind == Kind::ln || kind == Kind::log10;
}

forms::Form plain_form(const forms::Form& form) { return {form.kind, form.parameters}; }

WayBack::WayBack(const forms::Form& form)
    : offset(form.reflect ? *form.reflect + form.shift : -form.shift), sign(form.reflect ? -1.0 : 1.0) {}

}  // namespace formsieve::backtransform

#include "design/form_values.hpp"

#include "design/logarithm_kernel.hpp"
#include "forms/argument.hpp"

#include <cassert>

namespace formsieve::design {

void values_for_sums(const forms::Form& form, std::span<const double> x, std::span<double> out) {
  if (form.kind != forms::Kind::ln) {
    forms::evaluate_column(form, x, out);
    return;
  }
  assert(out.size() == x.size());
  forms::with_argument(form, [&](auto argument) {
    for (std::size_t i = 0; i < x.size(); ++i) out[i] = argument(x[i]);
  });
  take_logarithms(out.data(), out.size());
}

}  // namespace formsieve::design

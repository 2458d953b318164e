#include <formsieve/forms.hpp>

#include "forms/argument.hpp"
#include "forms/dispatch.hpp"

#include <cassert>

namespace formsieve::forms {

namespace {

double column_value(const Form& form, std::size_t index, double x) {
  return with_argument(form, [&](auto argument) {
    return visit_column(form, index, [&](const auto& function) { return function.value(argument(x)); });
  });
}

}  // namespace

double evaluate(const Form& form, double x) {
  assert(n_columns(form) == 1);
  return column_value(form, 0, x);
}

void evaluate(const Form& form, double x, std::span<double> out) {
  assert(out.size() == n_columns(form));
  for (std::size_t index = 0; index < out.size(); ++index) out[index] = column_value(form, index, x);
}

void evaluate_column(const Form& form, std::span<const double> x, std::span<double> out) {
  const std::size_t n = x.size();
  assert(out.size() == n * n_columns(form));
  for (std::size_t index = 0; index * n < out.size(); ++index) {
    const double* in = x.data();
    double* column = out.data() + index * n;
    with_argument(form, [&](auto argument) {
      visit_column(form, index, [&](const auto& function) {
        const auto local = function;  // a copy that the stores to `column` cannot alias
        for (std::size_t i = 0; i < n; ++i) column[i] = local.value(argument(in[i]));
      });
    });
  }
}

double derivative(const Form& form, double x) {
  return with_argument(form, [&](auto argument) {
    return visit_function(form, [&](const auto& function) {
      const double u = argument(x);
      return function.support.contains(u) ? argument.kSign * function.slope(u) : kNaN;
    });
  });
}

double log_abs_derivative(const Form& form, double x) {
  return with_argument(form, [&](auto argument) {
    return visit_function(form, [&](const auto& function) {
      const double u = argument(x);
      return function.support.contains(u) ? function.log_slope(u) : kNaN;
    });
  });
}

}  // namespace formsieve::forms

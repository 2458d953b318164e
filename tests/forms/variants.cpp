#include "variants.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::forms::tests {

namespace {

struct Argument {
  std::optional<double> reflect;
  double shift;
};

const std::vector<Argument> kArguments{
    {std::nullopt, 0.0}, {std::nullopt, 1.0}, {std::nullopt, 0.1}, {std::nullopt, -3.25}, {0.0, 0.0},
    {101.0, 0.0},        {1.0, 0.0},          {0.1, 0.2},          {2000.5, -1946.0}};

std::vector<Form> with_arguments(const std::vector<Form>& plain) {
  std::vector<Form> all;
  for (const Form& form : plain)
    for (const Argument& argument : kArguments) {
      all.push_back(form);
      all.back().reflect = argument.reflect;
      all.back().shift = argument.shift;
    }
  return all;
}

}  // namespace

std::vector<Form> functions() {
  std::vector<Form> plain;
  for (int kind = 0; kind < static_cast<int>(Kind::power); ++kind) plain.push_back({.kind = static_cast<Kind>(kind)});
  for (const double p : {-3.0, -2.0, -1.3, -1.0, -0.5, -1e-9, 0.1, 1.0 / 3.0, 0.5, 1.0, 1.5, 2.0, 2.7, 3.0, 4.0, 5.0})
    plain.push_back({.kind = Kind::power, .parameters = {p}});
  for (const double l : {-2.0, -1.0, -0.3, -1e-12, 0.0, 1e-300, 1e-9, 0.3, 0.5, 1.0, 2.0, 3.5})
    plain.push_back({.kind = Kind::box_cox, .parameters = {l}});
  for (const double l : {-1.0, -1e-10, 0.0, 0.4, 1.0, 1.5, 2.0, 2.0 + 1e-9, 3.0})
    plain.push_back({.kind = Kind::yeo_johnson, .parameters = {l}});
  return with_arguments(plain);
}

std::vector<Form> blocks() {
  std::vector<Form> plain{{.kind = Kind::quadratic}};
  for (const auto& powers :
       std::vector<std::vector<double>>{{-2, 0}, {0, 0}, {0.5, 0.5}, {-1, -1}, {1, 1}, {1, 2}, {3, 3}, {0.7, 3}})
    plain.push_back({.kind = Kind::fractional_polynomial, .parameters = powers});
  for (const auto& knots : std::vector<std::vector<double>>{{1, 4, 9}, {-2.5, 0.1, 3, 8}, {1, 2, 3.5, 7, 20}})
    plain.push_back({.kind = Kind::spline, .parameters = knots});
  std::vector<Form> all = with_arguments(plain);
  all.push_back({.kind = Kind::levels, .levels = {"north", "south", "other levels (2)"}, .pooled = {"east", "west"}});
  return all;
}

std::vector<double> points() {
  std::vector<double> sizes{0.0,  1e-300, 1e-200, 1e-100, 1e-20, 1e-8, 1e-3, 0.02, 0.1,   0.2,   0.25,  0.3,   0.31,
                            0.4,  0.499,  0.5,    0.6,    0.75,  0.8,  0.9,  0.99, 1.0,   1.01,  1.5,   2.0,   2.5,
                            3.25, 3.3,    4.0,    7.0,    9.0,   10.0, 20.0, 42.0, 53.0,  54.5,  99.9,  100.0, 101.0,
                            300., 365.25, 1e3,    1e6,    1e9,   1e16, 1e20, 1e60, 1e100, 1e154, 1e200, 1e300};
  std::vector<double> all;
  for (const double size : sizes) {
    all.push_back(size);
    if (size > 0.0) all.push_back(-size);
  }
  for (const double centre : {1.0, 101.0, 3.25, 0.3, 0.9})
    for (const double off : {1e-12, -1e-12, 1e-6, -1e-6}) all.push_back(centre + off);
  std::sort(all.begin(), all.end());
  return all;
}

std::vector<double> points_of(const Form& form) {
  std::vector<double> all = points();
  for (const double u :
       {0.0, 1e-6, 0.001, 0.02, 0.1, 0.25, 0.4, 0.499, 0.6, 0.75, 0.9, 0.99, 1.5, 3.0, 20.0, 400.0, -0.3, -2.0, -70.0})
    all.push_back(form.reflect ? (*form.reflect + form.shift) - u : u - form.shift);
  std::sort(all.begin(), all.end());
  return all;
}

std::vector<double> points_in(const Form& form, const Interval& interval) {
  std::vector<double> inside;
  for (const double x : points_of(form))
    if (interval.contains(x)) inside.push_back(x);
  return inside;
}

double argument(const Form& form, double x) { return form.reflect ? (*form.reflect + form.shift) - x : x + form.shift; }

std::string name(const Form& form) {
  std::string text = std::string(kind_name(form.kind)) + ": " + term_name(form, "x");
  for (const double p : form.parameters) text += " [" + std::to_string(p) + "]";
  return text;
}

}  // namespace formsieve::forms::tests

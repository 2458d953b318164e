// Property suite: values, derivatives, domains and loops over rows of every form.
#include "variants.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstring>
#include <limits>

using namespace formsieve::forms;
using namespace formsieve::forms::tests;

namespace {

constexpr double kEps = std::numeric_limits<double>::epsilon();
constexpr double kInf = std::numeric_limits<double>::infinity();

/// A step in x over which every form is close to a polynomial: a small share of the distance in u to the nearest place
/// where the form bends (0, 1 for shares, or a unit for the others).
double difference_step(const Form& form, double x) {
  const double u = std::fabs(argument(form, x));
  constexpr double kShare = 1e-3;
  switch (form.kind) {
    case Kind::exp:
      return kShare * std::fmax(1.0, u * 1e-9);
    case Kind::asinh:
      return kShare * std::fmax(1.0, u);
    case Kind::yeo_johnson:
      return kShare * (u == 0.0 ? 1.0 : u);
    case Kind::logit:
    case Kind::arcsine_sqrt:
      return kShare * std::fmin(u, 1.0 - u);
    default:
      return kShare * u;
  }
}

bool same_bits(double a, double b) { return (std::isnan(a) && std::isnan(b)) || std::memcmp(&a, &b, sizeof a) == 0; }

}  // namespace

TEST_CASE("forms: a derivative equals central differences when the step is small", "[forms][property]") {
  for (const Form& form : functions()) {
    int compared = 0;
    for (const double x : points_in(form, domain(form))) {
      const double h0 = difference_step(form, x);
      const volatile double right = x + h0;  // the step that the rounding of x + h leaves
      const double h = right - x;
      const double slope = derivative(form, x), value = evaluate(form, x);
      if (!std::isfinite(slope) || slope == 0.0 || !std::isfinite(value) || std::fabs(h - h0) > 1e-9 * h0) continue;
      const double two = 2.0 * h;
      if (evaluate(form, x + two) == value) continue;  // saturated: no difference to measure
      const double near = evaluate(form, x + h) - evaluate(form, x - h);
      const double far = evaluate(form, x + two) - evaluate(form, x - two);
      const double measured = (8.0 * near - far) / (12.0 * h);
      if (!std::isfinite(measured)) continue;
      // Fourth-order formula: (1e-3)⁴ times a fifth derivative, and the rounding of values and arguments over the step.
      const double rounding =
          8.0 * kEps * (std::fabs(value) / std::fabs(slope) + std::fabs(argument(form, x)) + std::fabs(x)) / h;
      if (rounding > 1e-3) continue;
      INFO(name(form) << " at " << x << ": " << slope << " by differences " << measured);
      CHECK(std::fabs(measured - slope) <= (2e-9 + rounding) * std::fabs(slope));
      ++compared;
    }
    // A power of −1e-9 is 1 to nine digits, and differences of it hold nothing.
    const bool flat = form.kind == Kind::power && std::fabs(form.parameters[0]) < 1e-6;
    INFO(name(form));
    CHECK((flat || compared >= 4));
  }
}

TEST_CASE("forms: the logarithm of a slope is that of the derivative wherever that is a normal number",
          "[forms][property]") {
  for (const Form& form : functions())
    for (const double x : points_in(form, domain(form))) {
      const double slope = std::fabs(derivative(form, x));
      const double log_slope = log_abs_derivative(form, x);
      INFO(name(form) << " at " << x);
      CHECK_FALSE(std::isnan(log_slope));
      if (slope > 1e-300 && slope < 1e300)
        CHECK(log_slope == Approx(std::log(slope)).epsilon(1e-13).margin(1e-13 * (1.0 + std::fabs(std::log(slope)))));
      else  // out of the range of doubles on the same side
        CHECK((slope < 1.0) == (log_slope < 0.0));
    }
}

TEST_CASE("forms: the logarithm of a slope is exact when the slope itself overflows", "[forms][unit]") {
  const double ln_1e300 = 300.0 * std::log(10.0);
  CHECK(log_abs_derivative({.kind = Kind::reciprocal}, 1e-300) == Approx(2.0 * ln_1e300).epsilon(1e-15));
  CHECK(log_abs_derivative({.kind = Kind::reciprocal_square}, 1e300) ==
        Approx(std::log(2.0) - 3.0 * ln_1e300).epsilon(1e-15));
  CHECK(log_abs_derivative({.kind = Kind::cube}, 1e300) == Approx(std::log(3.0) + 2.0 * ln_1e300).epsilon(1e-15));
  CHECK(log_abs_derivative({.kind = Kind::exp}, 5000.0) == 5000.0);
  CHECK(log_abs_derivative({.kind = Kind::power, .parameters = {-4.0}}, 1e-200) ==
        Approx(std::log(4.0) + 5.0 * 200.0 * std::log(10.0)).epsilon(1e-15));
  CHECK(log_abs_derivative({.kind = Kind::sqrt}, 0.0) == kInf);
  CHECK(log_abs_derivative({.kind = Kind::square}, 0.0) == -kInf);
}

TEST_CASE("forms: a value is defined exactly inside the domain when x is any finite number", "[forms][property]") {
  std::vector<Form> all = functions();
  const std::vector<Form> several = blocks();
  all.insert(all.end(), several.begin(), several.end());
  for (const Form& form : all) {
    if (form.kind == Kind::levels) continue;
    std::vector<double> columns(n_columns(form));
    for (const double x : points_of(form)) {
      evaluate(form, x, columns);
      INFO(name(form) << " at " << x);
      for (const double value : columns) CHECK(std::isnan(value) != domain(form).contains(x));
      if (columns.size() == 1) CHECK(same_bits(evaluate(form, x), columns[0]));
    }
    evaluate(form, std::nan(""), columns);
    for (const double value : columns) CHECK(std::isnan(value));
  }
}

TEST_CASE("forms: an edge of the domain is accepted when closed and refused when open", "[forms][property]") {
  int edges = 0;
  for (const Form& form : functions()) {
    const Interval d = domain(form);
    INFO(name(form) << " on " << d.lower << " to " << d.upper);
    for (const int side : {-1, 1}) {
      const double edge = side < 0 ? d.lower : d.upper;
      if (std::isinf(edge)) continue;
      const bool closed = side < 0 ? d.lower_closed : d.upper_closed;
      CHECK(std::isnan(evaluate(form, edge)) != closed);
      CHECK_FALSE(std::isnan(evaluate(form, std::nextafter(edge, -side * kInf))));
      const double beyond = edge + side * 4.0 * kEps * std::fmax(1.0, std::fabs(edge));
      CHECK(std::isnan(evaluate(form, beyond)));
      CHECK(std::isnan(derivative(form, beyond)));
      CHECK(std::isnan(log_abs_derivative(form, beyond)));
      ++edges;
    }
  }
  CHECK(edges > 100);
}

TEST_CASE("forms: what is undefined gives NaN on the points that people get wrong", "[forms][unit]") {
  CHECK(std::isnan(evaluate({.kind = Kind::reciprocal}, 0.0)));
  CHECK(std::isnan(evaluate({.kind = Kind::reciprocal}, -2.0)));
  CHECK(std::isnan(evaluate({.kind = Kind::sqrt}, -1e-300)));
  CHECK(std::isnan(evaluate({.kind = Kind::ln}, 0.0)));
  CHECK(std::isnan(evaluate({.kind = Kind::logit}, 1.0)));
  CHECK(std::isnan(evaluate({.kind = Kind::power, .parameters = {1.5}}, -2.0)));
  CHECK(evaluate({.kind = Kind::power, .parameters = {3.0}}, -2.0) == -8.0);
  CHECK(evaluate({.kind = Kind::power, .parameters = {4.0}}, -2.0) == 16.0);
  CHECK(evaluate({.kind = Kind::reciprocal, .reflect = 0.0}, -2.0) == 0.5);
  CHECK(evaluate({.kind = Kind::power, .parameters = {0.0}}, 7.0) == 1.0);
}

TEST_CASE("forms: values by column are those by row to the bit", "[forms][property]") {
  std::vector<Form> all = functions();
  const std::vector<Form> several = blocks();
  all.insert(all.end(), several.begin(), several.end());
  std::vector<double> x = points();
  x.push_back(std::nan(""));
  for (const Form& form : all) {
    const std::size_t k = n_columns(form);
    std::vector<double> by_column(k * x.size(), -99.0), by_row(k);
    evaluate_column(form, x, by_column);
    for (std::size_t i = 0; i < x.size(); ++i) {
      evaluate(form, x[i], by_row);
      INFO(name(form) << " at " << x[i]);
      for (std::size_t j = 0; j < k; ++j) CHECK(same_bits(by_row[j], by_column[j * x.size() + i]));
    }
  }
}

TEST_CASE("forms: a form of several columns holds what its description says", "[forms][unit]") {
  std::vector<double> two(2);
  evaluate({.kind = Kind::quadratic, .shift = -1946.0}, 1950.0, two);
  CHECK(two == std::vector<double>{4.0, 16.0});
  evaluate({.kind = Kind::fractional_polynomial, .parameters = {0.0, 0.0}}, std::exp(2.0), two);
  CHECK(two[0] == Approx(2.0).epsilon(1e-15));
  CHECK(two[1] == Approx(4.0).epsilon(1e-15));

  const Form levels{.kind = Kind::levels, .levels = {"north", "south", "others"}, .pooled = {"east", "west"}};
  CHECK(n_columns(levels) == 2);
  CHECK(level_code(levels, "north") == 0u);
  CHECK(level_code(levels, "west") == 2u);
  CHECK_FALSE(level_code(levels, "others"));  // the name of the pool is not a level
  CHECK_FALSE(level_code(levels, "centre"));
  evaluate(levels, 0.0, two);
  CHECK(two == std::vector<double>{0.0, 0.0});
  evaluate(levels, 2.0, two);
  CHECK(two == std::vector<double>{0.0, 1.0});
  evaluate(levels, 3.0, two);
  CHECK(std::isnan(two[0]));
}

TEST_CASE("forms: a restricted spline is straight beyond its outer knots and smooth at every knot",
          "[forms][property]") {
  for (const Form& form : blocks()) {
    if (form.kind != Kind::spline || form.reflect || form.shift != 0.0) continue;
    const std::size_t k = n_columns(form);
    const auto at = [&](double x, std::size_t j) {
      std::vector<double> out(k);
      evaluate(form, x, out);
      return out[j];
    };
    const double last = form.parameters.back(), first = form.parameters.front();
    for (std::size_t j = 1; j < k; ++j) {
      INFO(name(form) << " column " << j);
      CHECK(at(first - 5.0, j) == 0.0);
      const double bend = at(last + 1.0, j) - 2.0 * at(last + 2.0, j) + at(last + 3.0, j);
      CHECK(std::fabs(bend) <= 1e-13 * std::fabs(at(last + 3.0, j)));
      for (const double knot : form.parameters) {  // value, slope and second derivative agree from both sides
        constexpr double h = 1e-3;
        const double left = at(knot - 2 * h, j) - 2.0 * at(knot - h, j) + at(knot, j);
        const double right = at(knot, j) - 2.0 * at(knot + h, j) + at(knot + 2 * h, j);
        CHECK(std::fabs(left - right) <= 100.0 * h * h * h);
      }
    }
  }
}

// What is printed: exact texts, and every text evaluated again by a reader that knows nothing of forms.
#include "expression.hpp"
#include "variants.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>

using namespace formsieve::forms;
using namespace formsieve::forms::tests;

namespace {

constexpr double kEps = std::numeric_limits<double>::epsilon();

/// What the rounding of u, and of a Box-Cox power printed as (x^λ − 1)/λ and read in extended precision, may change.
double label_tolerance(const Form& form, double x, double value, double slope) {
  const double u_error = kEps * (std::fabs(x) + std::fabs(argument(form, x)));
  double tolerance = 8.0 * kEps * std::fabs(value) + (std::isfinite(slope) ? u_error * std::fabs(slope) : 0.0);
  if (form.kind == Kind::box_cox && form.parameters[0] != 0.0) tolerance += 1e-17 / std::fabs(form.parameters[0]);
  const double u = std::fabs(argument(form, x));
  // The exponent of a large power, read as p·ln u.
  return tolerance + (u > 0.0 ? kEps * std::fabs(std::log(u)) * std::fabs(value) : 0.0);
}

bool overflows_in_print(const Form& form) { return form.kind == Kind::box_cox && std::fabs(form.parameters[0]) < 1e-9; }

}  // namespace

TEST_CASE("forms: a printed form evaluated again equals its value", "[forms][property]") {
  for (const std::string column : {"x", "floor area"})
    for (const Form& form : functions()) {
      if (overflows_in_print(form)) continue;  // its print is exact, but no floating reader can evaluate it
      int compared = 0;
      for (const double x : points_in(form, domain(form))) {
        const double value = evaluate(form, x);
        if (!std::isfinite(value) || (value != 0.0 && std::fabs(value) < 1e-290)) continue;
        const std::string text = label(form, column);
        const double printed = static_cast<double>(value_of(text, {{column, x}}));
        INFO(text << " at " << x << ": " << value << " printed " << printed);
        const double slope = std::fabs(derivative(form, x));
        if (std::isinf(slope)) continue;
        CHECK(std::fabs(printed - value) <= label_tolerance(form, x, value, slope));
        ++compared;
      }
      INFO(name(form));
      CHECK(compared >= 4);
    }
}

TEST_CASE("forms: every printed column of a form of several evaluated again equals its value", "[forms][property]") {
  for (const Form& form : blocks()) {
    if (form.kind == Kind::levels) continue;
    std::vector<double> values(n_columns(form));
    for (const double x : points_in(form, domain(form))) {
      if (std::fabs(x) > 1e5 || std::fabs(argument(form, x)) < 1e-3) continue;
      evaluate(form, x, values);
      for (std::size_t j = 0; j < values.size(); ++j) {
        const std::string text = label(form, "x", j);
        const double printed = static_cast<double>(value_of(text, {{"x", x}}));
        INFO(text << " at " << x);
        CHECK(printed == Approx(values[j]).epsilon(1e-11).margin(1e-11));
      }
    }
  }
}

TEST_CASE("forms: a printed inverse evaluated again equals the inverse", "[forms][property]") {
  for (const Form& form : functions()) {
    if (overflows_in_print(form)) continue;
    int compared = 0;
    for (const double x : points_in(form, response_domain(form))) {
      const double z = evaluate(form, x);
      const double u = std::fabs(argument(form, x));
      if (!std::isfinite(z) || !inverse_domain(form).contains(z) || u > 1e12 || (u < 1e-12 && u != 0.0)) continue;
      const double back = inverse(form, z);
      const std::string text = inverse_label(form, "η");
      const double printed = static_cast<double>(value_of(text, {{"η", z}}));
      const double slope = std::fabs(derivative(form, x));
      const double from_z = z == 0.0 ? 0.0 : std::fabs(z) / slope;
      if (!std::isfinite(back) || u == 0.0 || kEps * from_z > 1e-3 * u) continue;
      INFO(text << " at " << z << ": " << back << " printed " << printed);
      const double lambda_error =
          form.kind == Kind::box_cox && form.parameters[0] != 0.0 ? 1e-17 / std::fabs(form.parameters[0]) : 0.0;
      CHECK(std::fabs(printed - back) <=
            8.0 * kEps *
                    (std::fabs(back) + u * (1.0 + std::fabs(std::log(u + 1e-300))) + from_z +
                     std::fabs(form.reflect.value_or(0.0)) + std::fabs(form.shift)) +
                lambda_error * u);
      ++compared;
    }
    INFO(name(form));
    CHECK(compared >= 4);
  }
}

TEST_CASE("forms: labels are written as a mathematician writes them", "[forms][unit]") {
  const auto text = [](const Form& form, const std::string& column = "x") { return label(form, column); };
  CHECK(text({.kind = Kind::ln}, "floor_area") == "ln(floor_area)");
  CHECK(text({.kind = Kind::sqrt, .reflect = 100.0, .shift = 1.0}, "fill") == "√(101 − fill)");
  CHECK(text({.kind = Kind::reciprocal, .shift = 1.0}) == "1/(x + 1)");
  CHECK(text({.kind = Kind::reciprocal}) == "1/x");
  CHECK(text({.kind = Kind::reciprocal}, "floor area") == "1/(floor area)");
  CHECK(text({.kind = Kind::cube_root}) == "∛(x)");
  CHECK(text({.kind = Kind::square}) == "x²");
  CHECK(text({.kind = Kind::cube, .shift = 0.5}) == "(x + 0.5)³");
  CHECK(text({.kind = Kind::reciprocal_sqrt}) == "1/√(x)");
  CHECK(text({.kind = Kind::reciprocal_square}) == "1/x²");
  CHECK(text({.kind = Kind::power, .parameters = {0.3}}) == "x^0.3");
  CHECK(text({.kind = Kind::power, .parameters = {-1.5}}) == "x^(−1.5)");
  CHECK(text({.kind = Kind::ln, .shift = -1946.0}, "year") == "ln(year − 1946)");
  CHECK(text({.kind = Kind::identity, .reflect = 0.0}) == "(−x)");
  CHECK(text({.kind = Kind::identity}, "floor area") == "floor area");
  CHECK(text({.kind = Kind::arcsine_sqrt}) == "arcsin(√(x))");
  CHECK(text({.kind = Kind::box_cox, .parameters = {0.3}, .shift = 1.0}) == "((x + 1)^0.3 − 1)/0.3");
  CHECK(text({.kind = Kind::box_cox, .parameters = {-1.3}}) == "(1 − x^(−1.3))/1.3");
  CHECK(text({.kind = Kind::box_cox, .parameters = {0.0}}) == "ln(x)");
  CHECK(text({.kind = Kind::yeo_johnson, .parameters = {0.0}}) == "YJ(x; 0)");
  CHECK(label({.kind = Kind::levels, .levels = {"north", "south"}}, "site") == "site = south");
  CHECK(label({.kind = Kind::spline, .parameters = {1, 4, 9}}, "x", 1) == "spline1(x; 1, 4, 9)");
  CHECK(label({.kind = Kind::fractional_polynomial, .parameters = {-1, -1}}, "x", 1) == "(1/x)·ln(x)");
  // 0.1 + 0.2 is 0.30000000000000004, and the label must read back to it.
  CHECK(text({.kind = Kind::ln, .reflect = 0.1, .shift = 0.2}) == "ln(0.30000000000000004 − x)");
  CHECK(text({.kind = Kind::ln, .shift = 1e-7}) == "ln(x + 1e-07)");
}

TEST_CASE("forms: term names and inverses are written out", "[forms][unit]") {
  CHECK(term_name({.kind = Kind::quadratic}, "x") == "quadratic(x)");
  CHECK(term_name({.kind = Kind::levels, .levels = {"a", "b"}}, "site") == "levels(site)");
  CHECK(term_name({.kind = Kind::fractional_polynomial, .parameters = {0, 2}, .shift = 1.0}, "x") ==
        "fractional-polynomial(x + 1; 0, 2)");
  CHECK(term_name({.kind = Kind::sqrt}, "x") == label({.kind = Kind::sqrt}, "x"));

  CHECK(inverse_label({.kind = Kind::ln}, "η") == "exp(η)");
  CHECK(inverse_label({.kind = Kind::sqrt}, "η") == "(η)²");
  CHECK(inverse_label({.kind = Kind::ln, .reflect = 101.0}, "η") == "101 − exp(η)");
  CHECK(inverse_label({.kind = Kind::ln, .shift = 20.0}, "η") == "exp(η) − 20");
  CHECK(inverse_label({.kind = Kind::identity}, "2 + 3·x") == "2 + 3·x");
  CHECK(inverse_label({.kind = Kind::identity, .reflect = 5.0}, "2 + 3·x") == "5 − (2 + 3·x)");
  CHECK(inverse_label({.kind = Kind::box_cox, .parameters = {-1.3}}, "η") == "(1 − 1.3·(η))^(−1/1.3)");
}

TEST_CASE("forms: names go both ways and every kind is described", "[forms][unit]") {
  CHECK(kind_names().size() == static_cast<std::size_t>(Kind::levels) + 1);
  for (std::size_t i = 0; i < kind_names().size(); ++i) {
    CHECK(kind_from_name(kind_names()[i]) == static_cast<Kind>(i));
    CHECK(describe(static_cast<Kind>(i)).size() > 10);
  }
  CHECK(kind_name(Kind::reciprocal_sqrt) == "reciprocal-sqrt");
  CHECK_FALSE(kind_from_name("log"));
}

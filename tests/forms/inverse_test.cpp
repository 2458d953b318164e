// Property suite: the forms as forms of a response.
#include "variants.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>

using namespace formsieve::forms;
using namespace formsieve::forms::tests;

namespace {

constexpr double kEps = std::numeric_limits<double>::epsilon();
constexpr double kInf = std::numeric_limits<double>::infinity();

}  // namespace

TEST_CASE("forms: the inverse returns to x to the last digits that z holds", "[forms][property]") {
  for (const Form& form : functions()) {
    REQUIRE(invertible(form));
    int compared = 0;
    for (const double x : points_in(form, response_domain(form))) {
      const double z = evaluate(form, x), slope = std::fabs(derivative(form, x));
      const double u = std::fabs(argument(form, x));
      // Subnormal and overflowing z have lost their digits.
      const bool tiny = z == 0.0 ? u != 0.0 && (u < 1e-90 || u > 700.0) : std::fabs(z) < 1e-300;
      if (!std::isfinite(z) || tiny) continue;
      // What one rounding of z, of u and of the exponent ln u means in x.
      const double from_z = z == 0.0 ? 0.0 : std::fabs(z) / slope;
      const double log_u = u > 0.0 ? std::fabs(std::log(u)) : 0.0;
      const double scale =
          std::fabs(x) + std::fabs(form.shift) + std::fabs(form.reflect.value_or(0.0)) + u * (1.0 + log_u);
      if (kEps * from_z > 1e-3 * u) continue;  // saturated: z no longer tells one x from another
      const double back = inverse(form, z);
      INFO(name(form) << " at " << x << ": z " << z << ", back " << back);
      CHECK(std::fabs(back - x) <= 4.0 * kEps * (scale + from_z));
      ++compared;
    }
    INFO(name(form));
    CHECK(compared >= 4);
  }
}

TEST_CASE("forms: the plain inverse loses at most a few units in the last place", "[forms][property]") {
  for (const Kind kind : {Kind::identity, Kind::square, Kind::cube, Kind::sqrt, Kind::cube_root, Kind::reciprocal,
                          Kind::reciprocal_sqrt, Kind::reciprocal_square})
    for (const double x : points_in({.kind = kind}, {1e-90, 1e90, true, true})) {
      const Form form{.kind = kind};
      INFO(name(form) << " at " << x);
      CHECK(std::fabs(inverse(form, evaluate(form, x)) - x) <= 6.0 * kEps * x);
    }
}

TEST_CASE("forms: the sign of the slope is that of every difference on the response's domain", "[forms][property]") {
  for (const Form& form : functions()) {
    double before = std::nan("");
    const int sign = monotone_sign(form);
    REQUIRE(std::abs(sign) == 1);
    int moved = 0;
    for (const double x : points_in(form, response_domain(form))) {
      const double now = evaluate(form, x);
      INFO(name(form) << " at " << x);
      if (!std::isnan(before)) CHECK(sign * now >= sign * before);
      if (!std::isnan(before) && now != before) ++moved;
      before = now;
      const double slope = derivative(form, x);
      if (slope != 0.0) CHECK((slope > 0.0) == (sign > 0));
    }
    CHECK(moved >= 4);
  }
}

TEST_CASE("forms: the inverse accepts what its domain says and moves the rest to a closed edge", "[forms][property]") {
  for (const Form& form : functions()) {
    const Interval image = inverse_domain(form);
    INFO(name(form) << " image " << image.lower << " to " << image.upper);
    CHECK(std::isnan(inverse(form, std::nan(""))));
    for (const int side : {-1, 1}) {
      const double edge = side < 0 ? image.lower : image.upper;
      const bool closed = side < 0 ? image.lower_closed : image.upper_closed;
      if (std::isinf(edge)) {
        CHECK_FALSE(closed);
        continue;
      }
      const double beyond = edge + side * (1.0 + std::fabs(edge));
      if (closed) {
        CHECK(std::isfinite(inverse(form, edge)));
        CHECK(inverse(form, beyond) == inverse(form, edge));
        CHECK(response_domain(form).contains(inverse(form, edge)));
      } else {
        CHECK(std::isnan(inverse(form, edge)));
        CHECK(std::isnan(inverse(form, beyond)));
      }
    }
    // Every value taken lies inside, but for rounding at an edge that is never reached.
    for (const double x : points_in(form, response_domain(form))) {
      const double z = evaluate(form, x);
      if (!std::isfinite(z)) continue;
      INFO("x " << x << " z " << z);
      CHECK(z >= image.lower);
      CHECK(z <= image.upper);
    }
  }
}

TEST_CASE("forms: the edges of the inverse are those of the mathematics", "[forms][unit]") {
  const auto edges = [](const Form& form) { return inverse_domain(form); };
  const Interval sqrt = edges({.kind = Kind::sqrt});
  CHECK(sqrt.lower == 0.0);
  CHECK(sqrt.lower_closed);
  CHECK(inverse({.kind = Kind::sqrt}, -3.0) == 0.0);
  CHECK(inverse({.kind = Kind::sqrt, .reflect = 101.0}, -3.0) == 101.0);

  const Interval arcsine = edges({.kind = Kind::arcsine_sqrt});
  CHECK(arcsine.lower_closed);
  CHECK(arcsine.upper_closed);
  CHECK(arcsine.upper == std::numbers::pi / 2.0);
  CHECK(inverse({.kind = Kind::arcsine_sqrt}, 2.0) == 1.0);

  const Interval half = edges({.kind = Kind::box_cox, .parameters = {0.5}});
  CHECK(half.lower == -2.0);
  CHECK(half.lower_closed);
  CHECK(inverse({.kind = Kind::box_cox, .parameters = {0.5}}, -9.0) == 0.0);
  const Interval negative = edges({.kind = Kind::box_cox, .parameters = {-0.5}});
  CHECK(negative.upper == 2.0);
  CHECK_FALSE(negative.upper_closed);
  CHECK(std::isnan(inverse({.kind = Kind::box_cox, .parameters = {-0.5}}, 2.0)));

  CHECK(edges({.kind = Kind::yeo_johnson, .parameters = {-0.5}}).upper == 2.0);
  CHECK(edges({.kind = Kind::yeo_johnson, .parameters = {3.0}}).lower == -1.0);
  CHECK(std::isinf(edges({.kind = Kind::ln}).lower));
  CHECK(std::isnan(inverse({.kind = Kind::reciprocal}, 0.0)));
  CHECK(std::isnan(inverse({.kind = Kind::reciprocal}, -1.0)));
  CHECK(std::isnan(inverse({.kind = Kind::exp}, 0.0)));
}

TEST_CASE("forms: the square of a response is inverted on its non-negative branch", "[forms][unit]") {
  const Form square{.kind = Kind::square};
  CHECK(domain(square).lower == -kInf);
  CHECK(response_domain(square).lower == 0.0);
  CHECK(response_domain(square).lower_closed);
  CHECK(inverse(square, 9.0) == 3.0);
  CHECK(inverse(square, -1.0) == 0.0);
  const Form fourth{.kind = Kind::power, .parameters = {4.0}, .reflect = 10.0};
  CHECK(response_domain(fourth).upper == 10.0);
  CHECK(inverse(fourth, 16.0) == Approx(8.0));
  CHECK(inverse({.kind = Kind::power, .parameters = {5.0}}, -32.0) == Approx(-2.0));
}

TEST_CASE("forms: what has several columns or no slope cannot be inverted", "[forms][unit]") {
  for (const Form& form : blocks()) {
    CHECK_FALSE(invertible(form));
    CHECK(monotone_sign(form) == 0);
    CHECK(std::isnan(inverse(form, 1.0)));
  }
  CHECK_FALSE(invertible({.kind = Kind::power, .parameters = {0.0}}));
}

TEST_CASE("forms: inverses by column are those one by one to the bit", "[forms][property]") {
  std::vector<double> z = points();
  z.push_back(std::nan(""));
  z.push_back(kInf);
  std::vector<double> by_column(z.size());
  std::vector<Form> all = functions();
  all.push_back({.kind = Kind::quadratic});
  for (const Form& form : all) {
    inverse_column(form, z, by_column);
    for (std::size_t i = 0; i < z.size(); ++i) {
      const double one = inverse(form, z[i]);
      INFO(name(form) << " at " << z[i]);
      CHECK((std::isnan(one) ? std::isnan(by_column[i]) : one == by_column[i]));
    }
  }
}

#include "design/form_values.hpp"
#include "design/logarithm_kernel.hpp"
#include "example.hpp"
#include "instruction_sets.hpp"

#include <cmath>
#include <limits>

using namespace formsieve;
using forms::Kind;

namespace {

/// Distance in units in the last place of `exact`.
double distance_in_units(double value, long double exact) {
  const double rounded = static_cast<double>(exact);
  const double unit = std::abs(std::nextafter(rounded, std::numeric_limits<double>::infinity()) - rounded);
  return static_cast<double>(std::abs(value - exact)) / unit;
}

}  // namespace

TEST_CASE("design: logarithms of many numbers are right to four units in the last place", "[design][property]") {
  test::for_each_instruction_set([] {
    std::mt19937_64 random(51);
    std::vector<double> u = {1.0, std::nextafter(1.0, 0.0),           std::nextafter(1.0, 2.0),          0.5,
                             2.0, std::numeric_limits<double>::min(), std::numeric_limits<double>::max()};
    for (int i = 0; i < 20000; ++i)
      u.push_back(std::exp2(i % 2 == 0 ? 4.0 * test::normal(random) : 300.0 * test::normal(random)));
    for (int i = 0; i < 20000; ++i) u.push_back(1.0 + 0.01 * test::normal(random));
    std::erase_if(u, [](double value) { return !(value > 0.0) || std::isinf(value); });
    std::vector<double> z = u;
    design::take_logarithms(z.data(), z.size());
    double worst = 0.0;
    for (std::size_t i = 0; i < u.size(); ++i)
      worst = std::max(worst, distance_in_units(z[i], std::log(static_cast<long double>(u[i]))));
    CHECK(worst <= 4.0);
  });
}

TEST_CASE("design: logarithms are not a number where there are none, in every lane", "[design][unit]") {
  test::for_each_instruction_set([] {
    for (std::size_t n = 1; n < 20; ++n) {
      for (const double wrong : {0.0, -0.0, -1.0, -std::numeric_limits<double>::infinity(), std::nan("")}) {
        for (std::size_t at = 0; at < n; ++at) {
          std::vector<double> z(n, 2.0);
          z[at] = wrong;
          design::take_logarithms(z.data(), n);
          for (std::size_t i = 0; i < n; ++i)
            CHECK((i == at ? std::isnan(z[i]) : std::abs(z[i] - std::log(2.0)) < 1e-15));
        }
      }
    }
  });
}

TEST_CASE("design: values for sums are those of the forms", "[design][property]") {
  std::mt19937_64 random(52);
  std::vector<double> x;
  for (int i = 0; i < 1000; ++i) x.push_back(std::exp(test::normal(random)));
  std::vector<forms::Form> menu;
  for (const Kind kind : {Kind::identity, Kind::ln, Kind::sqrt, Kind::reciprocal, Kind::quadratic})
    menu.push_back(test::form(kind));
  menu.push_back(test::form(Kind::ln));
  menu.back().shift = 0.25;
  menu.push_back(test::form(Kind::ln));
  menu.back().reflect = 1000.0;
  menu.back().shift = 0.5;
  for (const forms::Form& form : menu) {
    std::vector<double> values(x.size() * forms::n_columns(form));
    std::vector<double> expected(values.size());
    design::values_for_sums(form, x, values);
    forms::evaluate_column(form, x, expected);
    for (std::size_t i = 0; i < values.size(); ++i)
      CHECK(values[i] == Approx(expected[i]).epsilon(1e-15).margin(1e-15));
  }
}

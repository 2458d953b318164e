#include <formsieve/survey.hpp>

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <vector>

namespace formsieve::survey {
namespace {

forms::MenuEntry entry(forms::Kind kind, double shift = 0.0) {
  forms::Form form;
  form.kind = kind;
  form.shift = shift;
  return {form, "wanted"};
}

std::vector<double> range(double from, double to, int n) {
  std::vector<double> values;
  for (int i = 0; i < n; ++i) values.push_back(from + (to - from) * i / (n - 1));
  return values;
}

std::vector<forms::Kind> kinds(const forms::Menu& menu) {
  std::vector<forms::Kind> out;
  for (const auto& e : menu.entries) out.push_back(e.form.kind);
  return out;
}

/// The product-moment correlation as a plain two-pass loop in long double.
long double plain_correlation(const std::vector<double>& x, double (*f)(double), double (*g)(double)) {
  long double mean_f = 0;
  long double mean_g = 0;
  for (const double v : x) {
    mean_f += static_cast<long double>(f(v)) / static_cast<long double>(x.size());
    mean_g += static_cast<long double>(g(v)) / static_cast<long double>(x.size());
  }
  long double ff = 0;
  long double gg = 0;
  long double fg = 0;
  for (const double v : x) {
    ff += (f(v) - mean_f) * (f(v) - mean_f);
    gg += (g(v) - mean_g) * (g(v) - mean_g);
    fg += (f(v) - mean_f) * (g(v) - mean_g);
  }
  return fg / std::sqrt(ff * gg);
}

const forms::Menu kPositiveMenu{
    {entry(forms::Kind::reciprocal), entry(forms::Kind::ln), entry(forms::Kind::identity), entry(forms::Kind::sqrt)},
    {},
    {}};

TEST_CASE("survey: near-equal forms of a narrow column merge into the simplest", "[survey][unit]") {
  const forms::Menu merged = merge_near_equal(kPositiveMenu, range(100.0, 101.0, 50), "x");
  CHECK(kinds(merged) == std::vector{forms::Kind::identity});
  REQUIRE(merged.merged.size() == 3);
  for (const forms::Merged& m : merged.merged) {
    CHECK(m.kept == "x");
    CHECK(m.why.find("beyond 0.9999") != std::string::npos);
  }
  CHECK(merged.merged.back().dropped == "1/x");
  CHECK(merged.merged.back().why.find("correlate −0.99") != std::string::npos);
}

TEST_CASE("survey: forms of a wide column stay, in the menu's order", "[survey][unit]") {
  const forms::Menu kept = merge_near_equal(kPositiveMenu, range(1.0, 100.0, 50), "x");
  CHECK(kinds(kept) == std::vector{forms::Kind::reciprocal, forms::Kind::ln, forms::Kind::identity, forms::Kind::sqrt});
  CHECK(kept.merged.empty());
}

TEST_CASE("survey: near-equal forms are told apart on either side of a correlation of 0.9999", "[survey][property]") {
  const forms::Menu menu{{entry(forms::Kind::identity), entry(forms::Kind::ln)}, {}, {}};
  std::size_t n_merged = 0;
  std::size_t n_kept = 0;
  for (double ratio = 1.02; ratio < 1.2; ratio += 0.004) {
    const auto x = range(1.0, ratio, 40);
    const long double r = plain_correlation(
        x, [](double v) { return v; }, [](double v) { return std::log(v); });
    const bool expected = r > 0.9999L;
    INFO("largest over smallest " << ratio << ", correlation " << static_cast<double>(r));
    CHECK((merge_near_equal(menu, x, "x").entries.size() == 1) == expected);
    (expected ? n_merged : n_kept) += 1;
  }
  CHECK(n_merged > 5);
  CHECK(n_kept > 5);
}

TEST_CASE("survey: correlation of forms is exact for values with a large common part", "[survey][unit]") {
  // 10^9 + 0 … 1: products without centring would lose every digit that matters. A square is nearly straight here.
  const forms::Menu menu{{entry(forms::Kind::identity), entry(forms::Kind::square)}, {}, {}};
  CHECK(merge_near_equal(menu, range(1e9, 1e9 + 1.0, 60), "x").entries.size() == 1);
  // About zero it is not, whatever the unit.
  for (const double unit : {1e-150, 1.0, 1e150})
    CHECK(merge_near_equal(menu, range(-unit, unit, 60), "x").entries.size() == 2);
}

TEST_CASE("survey: missing values are passed over when forms are compared", "[survey][unit]") {
  auto x = range(100.0, 101.0, 50);
  x[7] = std::numeric_limits<double>::quiet_NaN();
  CHECK(merge_near_equal(kPositiveMenu, x, "x").entries.size() == 1);
  CHECK(merge_near_equal(kPositiveMenu, {}, "x").entries.size() == 4);
}

TEST_CASE("survey: a form that leaves the number range is struck with a reason", "[survey][unit]") {
  const forms::Menu menu{{entry(forms::Kind::identity), entry(forms::Kind::cube)}, {}, {}};
  const forms::Menu checked = merge_near_equal(menu, {1.0, 2.0, 1e200}, "x");
  CHECK(kinds(checked) == std::vector{forms::Kind::identity});
  REQUIRE(checked.struck.size() == 1);
  CHECK(checked.struck[0].label == "x³");
  CHECK_FALSE(checked.struck[0].why.empty());
  CHECK_FALSE(checked.struck[0].repair.empty());
}

TEST_CASE("survey: forms of several columns are kept beside near-equal ones", "[survey][unit]") {
  const forms::Menu menu{
      {entry(forms::Kind::identity), entry(forms::Kind::quadratic), entry(forms::Kind::sqrt)}, {}, {}};
  CHECK(kinds(merge_near_equal(menu, range(100.0, 101.0, 50), "x")) ==
        std::vector{forms::Kind::identity, forms::Kind::quadratic});
}

}  // namespace
}  // namespace formsieve::survey

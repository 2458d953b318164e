// Equivalence by algebra, held against the rank of the columns themselves.
#include <formsieve/forms.hpp>

#include <catch2/catch.hpp>

#include <Eigen/QR>

#include <cmath>

using namespace formsieve::forms;

namespace {

struct Argument {
  std::optional<double> reflect;
  double shift;
};

std::vector<Form> variants() {
  std::vector<Form> plain;
  for (int kind = 0; kind < static_cast<int>(Kind::power); ++kind) plain.push_back({.kind = static_cast<Kind>(kind)});
  for (const double p : {-2.0, -1.0, -0.5, 1.0 / 3.0, 0.4, 0.5, 1.0, 2.0, 3.0, 4.0})
    plain.push_back({.kind = Kind::power, .parameters = {p}});
  for (const double l : {-1.0, 0.0, 0.4, 0.5, 1.0, 2.0, 3.0})
    plain.push_back({.kind = Kind::box_cox, .parameters = {l}});
  for (const double l : {-0.5, 0.0, 0.6, 1.0, 1.4, 2.0, 2.5})
    plain.push_back({.kind = Kind::yeo_johnson, .parameters = {l}});
  plain.push_back({.kind = Kind::quadratic});
  plain.push_back({.kind = Kind::fractional_polynomial, .parameters = {1, 2}});
  plain.push_back({.kind = Kind::fractional_polynomial, .parameters = {2, 1}});
  plain.push_back({.kind = Kind::fractional_polynomial, .parameters = {0, 0.5}});
  plain.push_back({.kind = Kind::spline, .parameters = {0.5, 1.5, 3.0}});
  std::vector<Form> all;
  for (const Form& form : plain)
    for (const Argument& a : std::vector<Argument>{{std::nullopt, 0.0},
                                                   {std::nullopt, 1.5},
                                                   {std::nullopt, -1.5},
                                                   {4.0, 0.0},
                                                   {3.0, 1.0},
                                                   {1.0, 0.0},
                                                   {0.0, 1.5}}) {
      all.push_back(form);
      all.back().reflect = a.reflect;
      all.back().shift = a.shift;
    }
  return all;
}

/// A spline shows its space only on points on both sides of all its knots.
bool spans_knots(const Form& form, const std::vector<double>& x) {
  if (form.kind != Kind::spline) return true;
  const auto argument = [&](double at) { return form.reflect ? *form.reflect + form.shift - at : at + form.shift; };
  const double left = std::fmin(argument(x.front()), argument(x.back()));
  const double right = std::fmax(argument(x.front()), argument(x.back()));
  return left < form.parameters.front() - 0.2 && right > form.parameters.back() + 0.2;
}

/// Share of the columns of b that an intercept and the columns of a leave unexplained, over the points where both are
/// defined; unset when those are too few to tell.
std::optional<double> unexplained(const Form& a, const Form& b, const std::vector<double>& points) {
  std::vector<double> x;
  for (const double point : points)
    if (domain(a).contains(point) && domain(b).contains(point)) x.push_back(point);
  if (x.size() < 12 || !spans_knots(a, x) || !spans_knots(b, x)) return std::nullopt;
  const auto n = static_cast<Eigen::Index>(x.size());
  const auto standardised = [&](const Form& form) {
    Eigen::MatrixXd columns(n, static_cast<Eigen::Index>(n_columns(form)));
    evaluate_column(form, x, {columns.data(), static_cast<std::size_t>(columns.size())});
    columns.rowwise() -= columns.colwise().mean().eval();
    columns.colwise().normalize();
    return columns;
  };
  const Eigen::MatrixXd left = standardised(a), right = standardised(b);
  const Eigen::MatrixXd fitted = left * left.colPivHouseholderQr().solve(right);
  return (right - fitted).cwiseAbs().maxCoeff();
}

}  // namespace

TEST_CASE("forms: two forms are equivalent exactly when their columns span the same space", "[forms][property]") {
  std::vector<double> points;
  for (double x = -3.97; x < 5.0; x += 0.0711) points.push_back(x);
  const std::vector<Form> all = variants();
  int same = 0, different = 0;
  for (std::size_t i = 0; i < all.size(); ++i)
    for (std::size_t j = i; j < all.size(); ++j) {
      const auto forward = unexplained(all[i], all[j], points), backward = unexplained(all[j], all[i], points);
      if (!forward || !backward) continue;
      const bool span_same = *forward < 1e-10 && *backward < 1e-10;
      if (!span_same) {  // the test must tell the two cases apart
        INFO(term_name(all[i], "x") << " | " << term_name(all[j], "x") << " " << *forward << " " << *backward);
        CHECK(std::fmax(*forward, *backward) > 1e-7);
      }
      if (equivalent(all[i], all[j]) != span_same) {
        INFO(kind_name(all[i].kind) << " " << term_name(all[i], "x") << " | " << kind_name(all[j].kind) << " "
                                    << term_name(all[j], "x"));
        CHECK(equivalent(all[i], all[j]) == span_same);
      }
      CHECK(equivalent(all[i], all[j]) == equivalent(all[j], all[i]));
      ++(span_same ? same : different);
    }
  CHECK(same > 300);
  CHECK(different > 10000);
}

TEST_CASE("forms: forms known to be one are recognised", "[forms][unit]") {
  const Form ln{.kind = Kind::ln};
  CHECK(equivalent(ln, {.kind = Kind::log10}));
  CHECK(equivalent(ln, {.kind = Kind::box_cox, .parameters = {0.0}}));
  CHECK_FALSE(equivalent(ln, {.kind = Kind::ln, .shift = 1.0}));
  CHECK(equivalent({.kind = Kind::ln, .reflect = 100.0, .shift = 1.0}, {.kind = Kind::log10, .reflect = 101.0}));
  CHECK(equivalent({.kind = Kind::identity}, {.kind = Kind::power, .parameters = {1.0}, .reflect = 7.0}));
  CHECK(equivalent({.kind = Kind::cube_root}, {.kind = Kind::power, .parameters = {1.0 / 3.0}}));
  CHECK(equivalent({.kind = Kind::reciprocal}, {.kind = Kind::box_cox, .parameters = {-1.0}}));
  CHECK(equivalent({.kind = Kind::exp}, {.kind = Kind::exp, .shift = 3.0}));
  CHECK_FALSE(equivalent({.kind = Kind::square}, {.kind = Kind::square, .shift = 1.0}));
  CHECK(equivalent({.kind = Kind::quadratic}, {.kind = Kind::quadratic, .reflect = 3.0, .shift = 1.0}));
  CHECK(equivalent({.kind = Kind::spline, .parameters = {1, 2, 4}},
                   {.kind = Kind::spline, .parameters = {6, 8, 9}, .reflect = 10.0}));
  CHECK(
      equivalent({.kind = Kind::levels, .levels = {"a", "b", "c"}}, {.kind = Kind::levels, .levels = {"c", "a", "b"}}));
  CHECK_FALSE(equivalent({.kind = Kind::levels, .levels = {"a", "b", "c"}},
                         {.kind = Kind::levels, .levels = {"a", "others"}, .pooled = {"b", "c"}}));
}

TEST_CASE("forms: the simpler of two equal forms is the one a modeller would write", "[forms][unit]") {
  const auto simpler = [](const Form& a, const Form& b) { return complexity(a) < complexity(b); };
  CHECK(simpler({.kind = Kind::ln}, {.kind = Kind::log10}));
  CHECK(simpler({.kind = Kind::sqrt}, {.kind = Kind::power, .parameters = {0.5}}));
  CHECK(simpler({.kind = Kind::power, .parameters = {0.4}}, {.kind = Kind::box_cox, .parameters = {0.4}}));
  CHECK(simpler({.kind = Kind::ln, .shift = 1.0}, {.kind = Kind::yeo_johnson, .parameters = {0.0}}));
  CHECK(simpler({.kind = Kind::identity}, {.kind = Kind::identity, .reflect = 5.0}));
  CHECK(simpler({.kind = Kind::reciprocal}, {.kind = Kind::sqrt, .reflect = 101.0}));
  CHECK(simpler({.kind = Kind::yeo_johnson, .parameters = {0.5}, .reflect = 1.0, .shift = 1.0},
                {.kind = Kind::quadratic}));
}

// Means over normal residuals: the rule's moments, closed forms, and adaptive quadrature of Boost.
#include "backtransform/corrections.hpp"
#include "backtransform/gauss_hermite.hpp"
#include "backtransform/normal_theory.hpp"

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>

namespace {

using namespace formsieve;
using backtransform::kNodes;
using backtransform::normal_rule;
using backtransform::NormalMean;
using forms::Kind;

/// E h(η + sd·Z) over ±12 standard deviations, split where an argument meets a closed edge.
double adaptive(const forms::Form& form, double eta, double sd) {
  const forms::Interval domain = forms::inverse_domain(form);
  const auto integrand = [&](double z) {
    return forms::inverse(form, eta + sd * z) * std::exp(-0.5 * z * z) / std::sqrt(2.0 * std::numbers::pi);
  };
  std::vector<double> edges{-12.0, 0.0, 12.0};
  for (const double edge : {domain.lower, domain.upper, 0.0})
    if (std::isfinite(edge) && std::abs((edge - eta) / sd) < 12.0) edges.push_back((edge - eta) / sd);
  std::sort(edges.begin(), edges.end());
  double total = 0.0;
  for (std::size_t k = 1; k < edges.size(); ++k)
    if (edges[k] > edges[k - 1])
      total +=
          boost::math::quadrature::gauss_kronrod<double, 61>::integrate(integrand, edges[k - 1], edges[k], 12, 1e-13);
  return total;
}

}  // namespace

TEST_CASE("backtransform: the normal rule has the moments of the normal distribution", "[backtransform][unit]") {
  const auto& rule = normal_rule();
  REQUIRE(rule.nodes.size() == kNodes);
  CHECK((rule.weights > 0.0).all());
  double moment = 1.0;  // 1·3·5·…
  for (int power = 0; power < 2 * kNodes; power += 2) {
    CHECK((rule.weights * rule.nodes.pow(power)).sum() == Approx(moment).epsilon(1e-11));
    moment *= power + 1;
  }
  CHECK((rule.weights * rule.nodes.pow(7)).sum() == Approx(0.0).margin(1e-10));
  // Abramowitz & Stegun table 25.10, n = 20 (from memory): the largest node is 5.3874808900·√2.
  CHECK(rule.nodes[kNodes - 1] == Approx(5.3874808900112328 * std::numbers::sqrt2).epsilon(1e-13));
}

TEST_CASE("backtransform: normal theory has its closed forms", "[backtransform][unit]") {
  const double eta = 1.3, s = 0.4;
  CHECK(NormalMean({Kind::ln}, s)(eta, 1.0) == Approx(std::exp(eta + 0.08)).epsilon(1e-15));
  CHECK(NormalMean({Kind::ln}, s)(eta, 4.0) == Approx(std::exp(eta + 0.02)).epsilon(1e-15));
  CHECK(NormalMean({Kind::box_cox, {0.0}}, s)(eta, 1.0) == Approx(std::exp(eta + 0.08)).epsilon(1e-15));
  CHECK(NormalMean({Kind::log10}, s)(eta, 1.0) ==
        Approx(std::exp(eta * std::numbers::ln10 + 0.08 * std::pow(std::numbers::ln10, 2))).epsilon(1e-14));
  CHECK(NormalMean({Kind::sqrt}, s)(8.0, 1.0) == Approx(64.16).epsilon(1e-14));  // 20 sd from the edge
  CHECK(NormalMean({Kind::cube_root}, s)(eta, 1.0) == Approx(eta * eta * eta + 3.0 * eta * s * s).epsilon(1e-14));
  CHECK(NormalMean({Kind::identity}, s)(eta, 1.0) == eta);
  CHECK(NormalMean({Kind::asinh}, s)(eta, 1.0) == Approx(std::sinh(eta) * std::exp(0.08)).epsilon(1e-14));
  const forms::Form reflected{Kind::ln, {}, 101.0, 0.5};
  CHECK(NormalMean(reflected, s)(eta, 1.0) == Approx(101.5 - std::exp(eta + 0.08)).epsilon(1e-14));
  CHECK(std::isnan(NormalMean({Kind::sqrt}, std::numeric_limits<double>::quiet_NaN())(eta, 1.0)));
  CHECK(std::isnan(NormalMean({Kind::cube_root}, std::numeric_limits<double>::quiet_NaN())(eta, 1.0)));
  CHECK(NormalMean({Kind::sqrt}, 0.0)(-1.0, 1.0) == 0.0);
}

TEST_CASE("backtransform: normal theory agrees with adaptive quadrature", "[backtransform][reference]") {
  struct Row {
    forms::Form form;
    double eta, s, tolerance;
  };
  // Smooth inverses to rounding or nearly; where an argument may meet a kink or an edge, to what 20 nodes can do.
  const std::vector<Row> rows{
      {{Kind::ln}, 0.7, 1.5, 1e-12},
      {{Kind::log10}, 0.7, 0.5, 1e-12},
      {{Kind::sqrt}, 0.3, 0.5, 1e-12},
      {{Kind::sqrt}, -0.4, 0.5, 1e-11},
      {{Kind::cube_root}, 0.4, 0.8, 1e-12},
      {{Kind::asinh}, 0.4, 1.2, 1e-12},
      {{Kind::logit}, 0.4, 1.0, 1e-9},
      {{Kind::logit}, -2.0, 0.5, 1e-12},
      {{Kind::reciprocal}, 4.0, 0.3, 1e-9},
      {{Kind::reciprocal_sqrt}, 4.0, 0.3, 1e-8},
      {{Kind::square}, 5.0, 0.4, 1e-12},
      {{Kind::square}, 0.5, 0.4, 1e-2},
      {{Kind::cube}, 5.0, 0.4, 1e-12},
      {{Kind::exp}, 4.0, 0.3, 1e-10},
      {{Kind::arcsine_sqrt}, 0.8, 0.1, 1e-12},
      {{Kind::arcsine_sqrt}, 0.1, 0.1, 2e-2},
      {{Kind::power, {0.3}}, 4.0, 0.3, 1e-12},
      {{Kind::box_cox, {0.4}}, 2.0, 0.3, 1e-12},
      {{Kind::box_cox, {-0.5}}, 0.5, 0.1, 1e-9},
      {{Kind::yeo_johnson, {0.0}}, 0.3, 0.5, 1e-3},
      {{Kind::yeo_johnson, {0.0}}, 4.0, 0.4, 1e-12},
  };
  for (const auto& row : rows) {
    const double truth = adaptive(row.form, row.eta, row.s), ours = NormalMean(row.form, row.s)(row.eta, 1.0);
    INFO(forms::label(row.form, "y") << " η " << row.eta << " s " << row.s << ": " << ours << " against " << truth);
    CHECK(ours == Approx(truth).epsilon(row.tolerance));
  }
}

TEST_CASE("backtransform: normal theory is undefined where the rule meets a pole", "[backtransform][unit]") {
  CHECK(std::isfinite(NormalMean({Kind::reciprocal}, 0.1)(0.8, 1.0)));
  CHECK(std::isnan(NormalMean({Kind::reciprocal}, 0.1)(0.7, 1.0)));  // 7.6 sd reach the pole
}

// CV+ against plain loops over its definition; carrying through the inverse; normal theory against Student's t.
#include "backtransform/intervals.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>

namespace {

using namespace formsieve;
using backtransform::carried;
using backtransform::CrossInterval;
using backtransform::Ends;
using backtransform::NormalInterval;
using forms::Kind;

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// q⁺ and q⁻ of Barber, Candès, Ramdas & Tibshirani 2021, section 1.1 (from memory): the ⌈(1 − α)(n + 1)⌉-th and the
/// ⌊α(n + 1)⌋-th smallest value, α a fraction of whole numbers so that nothing is rounded.
Ends plain(const std::vector<std::vector<double>>& residuals, const std::vector<double>& predictions, double scale,
           std::size_t alpha_percent) {
  std::vector<double> low, high;
  for (std::size_t g = 0; g < residuals.size(); ++g)
    for (const double r : residuals[g]) {
      low.push_back(predictions[g] - r * scale);
      high.push_back(predictions[g] + r * scale);
    }
  std::sort(low.begin(), low.end());
  std::sort(high.begin(), high.end());
  const std::size_t n = low.size();
  const std::size_t lower = alpha_percent * (n + 1) / 100;
  const std::size_t upper = ((100 - alpha_percent) * (n + 1) + 99) / 100;
  return {lower == 0 ? -kInfinity : low[lower - 1], upper > n ? kInfinity : high[upper - 1]};
}

std::vector<std::vector<double>> random_residuals(std::mt19937& generator, std::size_t n_folds, std::size_t most) {
  std::uniform_int_distribution<std::size_t> size(0, most);
  std::gamma_distribution<double> gamma(0.7);
  std::bernoulli_distribution tie(0.3);
  std::vector<std::vector<double>> residuals(n_folds);
  for (auto& of_fold : residuals) {
    of_fold.resize(size(generator));
    for (double& r : of_fold) r = tie(generator) ? 0.5 : gamma(generator);
    std::sort(of_fold.begin(), of_fold.end());
  }
  if (residuals.front().empty()) residuals.front() = {0.3};
  return residuals;
}

}  // namespace

TEST_CASE("backtransform: CV+ has the order statistics of its definition", "[backtransform][property]") {
  std::mt19937 generator(3);
  std::normal_distribution<double> normal;
  for (int trial = 0; trial < 400; ++trial) {
    const std::size_t n_folds = 2 + static_cast<std::size_t>(trial % 11), most = trial % 3 == 0 ? 3 : 60;
    const auto residuals = random_residuals(generator, n_folds, most);
    const double spread = trial % 2 == 0 ? 0.1 : 5.0;  // folds that agree, and folds that do not
    std::vector<double> predictions(n_folds);
    for (double& eta : predictions) eta = 2.0 + spread * normal(generator);
    for (const std::size_t alpha : {5UL, 10UL, 20UL}) {
      for (const bool weighted : {false, true}) {
        const CrossInterval ours({Kind::identity}, residuals, weighted, 1.0 - static_cast<double>(alpha) / 100.0);
        const Ends expected = plain(residuals, predictions, weighted ? 0.5 : 1.0, alpha);
        const Ends found = ours.on_form_scale(predictions, 4.0);
        INFO("trial " << trial << ", n " << ours.n_residuals() << ", α " << alpha);
        CHECK(found.lower == expected.lower);
        CHECK(found.upper == expected.upper);
      }
    }
  }
}

TEST_CASE("backtransform: CV+ counts ranks exactly where α(n + 1) is whole", "[backtransform][unit]") {
  // n = 19, α = 0.05: the 19th smallest of 19 is the upper end, the 1st the lower; n = 18 has neither.
  std::vector<double> residuals(19);
  for (std::size_t i = 0; i < 19; ++i) residuals[i] = static_cast<double>(i + 1);
  const Ends ends = CrossInterval({Kind::identity}, {residuals}, false).on_form_scale(std::vector<double>{100.0});
  CHECK(ends.lower == 81.0);
  CHECK(ends.upper == 119.0);
  residuals.pop_back();
  const Ends none = CrossInterval({Kind::identity}, {residuals}, false).on_form_scale(std::vector<double>{100.0});
  CHECK(none.lower == -kInfinity);
  CHECK(none.upper == kInfinity);
}

TEST_CASE("backtransform: ends are carried through the inverse and swapped by a falling one", "[backtransform][unit]") {
  const auto same = [](Ends found, double lower, double upper) {
    CHECK(found.lower == Approx(lower).epsilon(1e-14));
    CHECK(found.upper == Approx(upper).epsilon(1e-14));
  };
  same(carried({Kind::ln}, {0.0, 1.0}), 1.0, std::exp(1.0));
  same(carried({Kind::sqrt}, {2.0, 3.0}), 4.0, 9.0);
  CHECK(carried({Kind::sqrt}, {-1.0, 3.0}).lower == 0.0);  // moved to the closed edge
  same(carried({Kind::reciprocal}, {0.25, 0.5}), 2.0, 4.0);
  CHECK(carried({Kind::reciprocal}, {-0.1, 0.5}).upper == kInfinity);  // beyond the pole
  CHECK(carried({Kind::reciprocal}, {0.0, 0.5}).upper == kInfinity);
  CHECK(carried({Kind::reciprocal}, {0.1, kInfinity}).lower == 0.0);
  CHECK(carried({Kind::ln}, {-kInfinity, kInfinity}).lower == 0.0);
  CHECK(carried({Kind::ln}, {-kInfinity, kInfinity}).upper == kInfinity);
  const forms::Form reflected{Kind::ln, {}, 101.0, 0.0};  // ln(101 − y) falls in y
  same(carried(reflected, {0.0, std::log(40.0)}), 61.0, 100.0);
  CHECK(carried(reflected, {-kInfinity, 0.0}).upper == 101.0);
  CHECK(carried(reflected, {0.0, kInfinity}).lower == -kInfinity);
  const forms::Form both{Kind::reciprocal, {}, 101.0, 0.0};  // 1/(101 − y) rises
  same(carried(both, {0.1, 0.5}), 91.0, 99.0);
  CHECK(carried(both, {-1.0, 0.5}).lower == -kInfinity);
  CHECK(std::isnan(carried({Kind::ln}, {std::nan(""), 1.0}).lower));
}

TEST_CASE("backtransform: carried ends hold the same rows as those on the form's scale", "[backtransform][property]") {
  std::mt19937 generator(5);
  std::uniform_real_distribution<double> y(0.05, 0.95), end(-1.0, 2.5);
  const std::vector<forms::Form> responses{{Kind::ln},
                                           {Kind::sqrt},
                                           {Kind::reciprocal},
                                           {Kind::square},
                                           {Kind::logit},
                                           {Kind::arcsine_sqrt},
                                           {Kind::cube_root},
                                           {Kind::exp},
                                           {Kind::box_cox, {-1.3}},
                                           {Kind::reciprocal_sqrt},
                                           {Kind::yeo_johnson, {2.5}}};
  for (forms::Form form : responses)
    for (const bool reflect : {false, true}) {
      if (reflect) form.reflect = 1.0;
      for (int i = 0; i < 300; ++i) {
        const double measured = y(generator), z = forms::evaluate(form, measured);
        double a = end(generator), b = end(generator);
        if (a > b) std::swap(a, b);
        const Ends own = carried(form, {a, b});
        INFO(forms::label(form, "y") << " y " << measured << " ends " << a << ", " << b);
        CHECK((own.lower <= measured && measured <= own.upper) == (a <= z && z <= b));
      }
    }
}

TEST_CASE("backtransform: the normal interval is Student's", "[backtransform][unit]") {
  const double t = boost::math::quantile(boost::math::students_t(28.0), 0.975);
  CHECK(t == Approx(2.048407).epsilon(1e-6));  // handbook tables of t, 28 degrees of freedom
  const NormalInterval interval({Kind::ln}, 0.4, 28.0);
  const Ends form = interval.on_form_scale(1.0, 0.2, 2.0);
  CHECK(form.upper - 1.0 == Approx(t * 0.4 * std::sqrt(0.7)).epsilon(1e-14));
  CHECK(1.0 - form.lower == Approx(t * 0.4 * std::sqrt(0.7)).epsilon(1e-14));
  CHECK(interval.in_own_units(1.0, 0.2, 2.0).upper == Approx(std::exp(form.upper)).epsilon(1e-15));
  const Ends whole = NormalInterval({Kind::ln}, std::nan(""), 0.0).in_own_units(1.0, 0.2);
  CHECK(whole.lower == 0.0);
  CHECK(whole.upper == kInfinity);
}

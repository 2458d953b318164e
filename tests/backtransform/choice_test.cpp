#include "backtransform/choice.hpp"
#include "backtransform/words.hpp"

#include <catch2/catch.hpp>

#include <array>
#include <cmath>
#include <limits>
#include <vector>

namespace {

using namespace formsieve;
using backtransform::bias_by_thirds;
using backtransform::choose;
using backtransform::HeldOutMeans;
using backtransform::Method;
using Catch::Contains;
using forms::Kind;

/// 90 rows in two repeats, rising η, measured about 10 with noise that cancels in each third; predictions too high by
/// `shift` in each third.
struct Made {
  std::vector<double> eta, measured, smeared, by_thirds;
  HeldOutMeans means() const { return {eta, measured, smeared, by_thirds}; }
};

Made made(const std::array<double, 3>& smeared_bias, const std::array<double, 3>& thirds_bias, double noise) {
  Made held;
  for (int i = 0; i < 90; ++i) held.measured.push_back(10.0 + ((i * 37) % 90 % 2 == 0 ? noise : -noise));
  for (int repeat = 0; repeat < 2; ++repeat)
    for (int i = 0; i < 90; ++i) {
      held.eta.push_back((i * 37) % 90);  // in no order
      const auto third = static_cast<std::size_t>(held.eta.back() / 30.0);
      held.smeared.push_back(10.0 + smeared_bias[third]);
      held.by_thirds.push_back(10.0 + thirds_bias[third]);
    }
  return held;
}

}  // namespace

TEST_CASE("backtransform: bias by thirds is the mean error of each third of the predictions", "[backtransform][unit]") {
  const Made held = made({1.0, 0.0, -2.0}, {0.0, 0.0, 0.0}, 0.5);
  std::array<double, 3> total{};
  std::array<double, 3> squares{};
  for (std::size_t i = 0; i < 90; ++i) {
    const double error = held.smeared[i] - held.measured[i];
    total[static_cast<std::size_t>(held.eta[i] / 30.0)] += error;
    squares[static_cast<std::size_t>(held.eta[i] / 30.0)] += error * error;
  }
  const auto bias = bias_by_thirds(held.means(), held.smeared);
  REQUIRE(bias);
  for (std::size_t k = 0; k < 3; ++k) {
    CHECK(bias->bias[k] == Approx(total[k] / 30.0).epsilon(1e-12));
    const double variance = squares[k] / 30.0 - std::pow(total[k] / 30.0, 2);
    // Two repeats of 30 rows count as 30 rows: Σd² doubles, and so does what it is divided by, 59 against 60.
    CHECK(bias->standard_error[k] == Approx(std::sqrt(variance * 60.0 / 59.0 / 30.0)).epsilon(1e-10));
  }
  Made undefined = held;
  undefined.smeared[40] = std::numeric_limits<double>::quiet_NaN();
  CHECK_FALSE(bias_by_thirds(undefined.means(), undefined.smeared));
}

TEST_CASE("backtransform: thirds are used when they clearly mend what unequal spread does", "[backtransform][unit]") {
  const Made clear = made({1.0, 0.0, -1.0}, {0.1, 0.0, -0.1}, 0.5);
  CHECK(choose(true, clear.means()).used == Method::thirds);
  CHECK_THAT(choose(true, clear.means()).why, Contains("Smearing by thirds is used: the spread is unequal"));
  CHECK(choose(false, clear.means()).used == Method::smearing);
  const Made little = made({1.0, 0.0, -1.0}, {0.8, 0.0, -0.8}, 0.5);  // leaves four fifths
  CHECK(choose(true, little.means()).used == Method::smearing);
  CHECK_THAT(choose(true, little.means()).why, Contains("does not pay for three factors"));
  const Made chance = made({1.0, 0.0, -1.0}, {0.1, 0.0, -0.1}, 8.0);  // standard errors of about 1.5
  CHECK(choose(true, chance.means()).used == Method::smearing);
  CHECK_THAT(choose(true, chance.means()).why, Contains("within chance"));
  Made undefined = clear;
  undefined.by_thirds[3] = std::numeric_limits<double>::quiet_NaN();
  CHECK(choose(true, undefined.means()).used == Method::smearing);
  CHECK_THAT(choose(true, undefined.means()).why, Contains("cannot be judged"));
}

TEST_CASE("backtransform: mean and median are told apart with figures", "[backtransform][unit]") {
  using backtransform::mean_median_words;
  CHECK(mean_median_words({Kind::ln}, 4240.0, 4117.0) ==
        "The uncorrected prediction is a median, where residuals are symmetric: on these rows it is 2.9 % (123 in own "
        "units) below the mean on average.");
  CHECK_THAT(mean_median_words({Kind::ln, {}, 100.0, 0.0}, 60.0, 63.0),
             Contains("5 % (3 in own units) above the mean"));
  CHECK_THAT(mean_median_words({Kind::identity}, 1.0, 1.0), Contains("its mean and its median are the same"));
  CHECK_THAT(mean_median_words({Kind::reciprocal}, std::nan(""), 1.0), Contains("undefined"));
}

TEST_CASE("backtransform: numbers in sentences", "[backtransform][unit]") {
  using backtransform::number_words;
  CHECK(number_words(1234567.0) == "1,234,567");
  CHECK(number_words(1234.4) == "1,234");
  CHECK(number_words(-0.01234) == "−0.0123");
  CHECK(number_words(999.6) == "1,000");
  CHECK(backtransform::percent_words(0.0291) == "2.9 %");
  const auto pair = backtransform::pair_words(101.21, 101.38);
  CHECK(pair.first == "101.2");
  CHECK(pair.second == "101.4");
  CHECK(backtransform::pair_words(2.0, 2.0).first == "2");
  CHECK(backtransform::range_words(2.7, 3.041).first == "2.70");
  CHECK(backtransform::range_words(2.7, 3.041).second == "3.04");
  CHECK(backtransform::range_words(-14.26, 0.21).first == "−14.3");
  CHECK(backtransform::range_words(-0.001, 12.0).first == "0.0");
  CHECK(backtransform::range_words(-14000.4, 21.3).first == "−14,000");
}

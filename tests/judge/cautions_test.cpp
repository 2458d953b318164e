#include "judge/judge.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <limits>

namespace formsieve::judge {

namespace {

Candidate sound() {
  Candidate one;
  one.number = "12";
  one.response_column = "energy_kwh";
  one.n = 400;
  one.likelihood.n_parameters = 4;
  one.cv.rmse = 10.0;
  one.cv.bias = 0.1;
  one.r2_own_units = 0.8;
  one.back.smearing_factor = 1.02;
  return one;
}

bool says(const std::vector<std::string>& sentences, const std::string& part) {
  return std::any_of(sentences.begin(), sentences.end(),
                     [&](const std::string& sentence) { return sentence.find(part) != std::string::npos; });
}

Shortlist searched(const std::string& candidates, std::size_t rows) {
  Shortlist shortlist;
  shortlist.space.candidates = candidates;
  shortlist.space.scored = candidates;
  shortlist.data.rows_used = rows;
  return shortlist;
}

}  // namespace

TEST_CASE("judge: a sound candidate has no cautions", "[judge][unit]") { CHECK(candidate_cautions(sound()).empty()); }

TEST_CASE("judge: a failed check is said in words with its size", "[judge][unit]") {
  Candidate one = sound();
  checks::Check check;
  check.name = "equal-spread";
  check.size_words = "residuals spread 3.1 times as widely in the top third of fitted values as in the bottom third";
  check.p_adjusted = 0.00123;
  check.passes = false;
  one.checks = {check};
  CHECK(candidate_cautions(one) ==
        std::vector<std::string>{"Equal-spread fails: residuals spread 3.1 times as widely in the top third of fitted "
                                 "values as in the bottom third (p 0.00123 after adjustment)."});
  one.checks[0].p_adjusted = 1e-9;
  CHECK(says(candidate_cautions(one), "(p below 0.0001 after adjustment)"));
  one.checks[0].passes = true;
  CHECK(candidate_cautions(one).empty());
}

TEST_CASE("judge: undefined held-out predictions are counted", "[judge][unit]") {
  Candidate one = sound();
  one.cv = CrossValidation{};
  one.cv.n_undefined = 3;
  CHECK(says(candidate_cautions(one), "3 held-out predictions are undefined in own units"));
}

TEST_CASE("judge: a notable bias correction is said, a strong one with its reason", "[judge][unit]") {
  Candidate one = sound();
  one.back.smearing_factor = 1.2;
  CHECK(says(candidate_cautions(one), "too low on average: the mean is 1.2 times"));
  CHECK_FALSE(says(candidate_cautions(one), "few large residuals"));
  one.back.smearing_factor = 1.8;
  CHECK(says(candidate_cautions(one), "few large residuals"));
  one.back.smearing_factor = 0.8;
  CHECK(says(candidate_cautions(one), "too high on average"));
  one.back.smearing_factor = std::numeric_limits<double>::infinity();
  CHECK(candidate_cautions(one).empty());
}

TEST_CASE("judge: few rows for the coefficients are said", "[judge][unit]") {
  Candidate one = sound();
  one.n = 30;  // 3 coefficients, ten rows each
  CHECK_FALSE(says(candidate_cautions(one), "fewer than ten"));
  one.n = 29;
  CHECK(says(candidate_cautions(one), "29 rows for 3 coefficients, fewer than ten for each"));
  one.n = 5;  // q + 1
  CHECK(says(candidate_cautions(one), "AICc is infinite"));
  one.n = 6;
  CHECK_FALSE(says(candidate_cautions(one), "AICc is infinite"));
}

TEST_CASE("judge: weak equations and biased predictions are said", "[judge][unit]") {
  Candidate one = sound();
  one.r2_own_units = 0.2;
  CHECK(says(candidate_cautions(one), "It explains 20 % of the variation in own units"));
  one.r2_own_units = -0.1;
  CHECK(says(candidate_cautions(one), "worse than the plain mean"));
  one = sound();
  one.cv.bias = -1.5;  // standard error 10/√400 = 0.5
  CHECK(says(candidate_cautions(one), "too low by 1.5 on average, 15 % of the cross-validated error"));
  one.n = 100;  // standard error 1: within two of them
  CHECK_FALSE(says(candidate_cautions(one), "too low by"));
}

TEST_CASE("judge: edges beyond which new rows cannot be scored are said", "[judge][unit]") {
  Candidate one = sound();
  Term reflected{"fill_percent", {}};
  reflected.form.kind = forms::Kind::sqrt;
  reflected.form.reflect = 100.5;
  Term shifted{"rain", {}};
  shifted.form.kind = forms::Kind::ln;
  shifted.form.shift = 1.0;
  Term plain{"floor_area", {}};
  plain.form.kind = forms::Kind::ln;
  const double infinity = std::numeric_limits<double>::infinity();
  one.terms = {reflected, shifted, plain};
  one.ranges = {{"fill_percent", 40.0, 99.0, {-infinity, 100.5, false, true}, {}},
                {"rain", 0.0, 12.0, {-1.0, infinity, false, false}, {}},
                {"floor_area", 10.0, 90.0, {0.0, infinity, false, false}, {}}};
  const auto said = candidate_cautions(one);
  CHECK(says(said, "only if fill_percent is at most 100.5: the largest seen was 99."));
  CHECK(says(said, "only if rain is above −1: the smallest seen was 0."));
  CHECK_FALSE(says(said, "floor_area"));
}

TEST_CASE("judge: the general cautions speak of cause, range, search and rules", "[judge][unit]") {
  const auto said = general_cautions(searched("9375", 400));
  CHECK(says(said, "not what causes what"));
  CHECK(says(said, "outside the ranges"));
  CHECK(says(said, "best of 9,375 candidates on the same 400 rows, so its cross-validated error is too low"));
  CHECK(says(said, "p-values"));
  CHECK(says(said, "licensed professional"));
  CHECK_FALSE(says(said, "hangs on few"));
  CHECK(says(general_cautions(searched("9375", 60)), "With 60 rows"));
}

TEST_CASE("judge: a search that was stopped counts what it scored", "[judge][unit]") {
  Shortlist shortlist = searched("1000000", 400);
  shortlist.space.scored = "2000";
  shortlist.space.complete = false;
  CHECK(says(general_cautions(shortlist), "best of 2,000 candidates"));
}

TEST_CASE("judge: a single candidate was not searched for", "[judge][unit]") {
  const auto said = general_cautions(searched("1", 400));
  CHECK(says(said, "nothing was chosen among others"));
  CHECK_FALSE(says(said, "after a search"));
  CHECK(says(said, "licensed professional"));
}

}  // namespace formsieve::judge

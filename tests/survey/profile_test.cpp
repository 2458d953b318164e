#include <formsieve/survey.hpp>

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <vector>

#include "reference.hpp"
#include "tables.hpp"

namespace formsieve::survey {
namespace {

using testing::has_note;
using testing::kMissing;
using testing::numbers;
using testing::table_of;
using testing::texts;

const FormTrial* trial(const ColumnProfile& profile, const std::string& label) {
  const auto found =
      std::find_if(profile.forms.begin(), profile.forms.end(), [&](const FormTrial& t) { return t.label == label; });
  return found == profile.forms.end() ? nullptr : &*found;
}

TEST_CASE("survey: profile of numbers holds the figures of outside programs", "[survey][reference]") {
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    INFO(name);
    const ColumnProfile found = profile_numbers("x", testing::values_of(column), std::nullopt);
    CHECK(found.mean == Approx(column.at("mean").get<double>()));
    CHECK(found.sd == Approx(column.at("sd").get<double>()));
    CHECK(found.facts.skewness == Approx(column.at("skewness_G1").get<double>()));
    CHECK(found.excess_kurtosis == Approx(column.at("excess_kurtosis_G2").get<double>()));
    CHECK(found.medcouple == Approx(column.at("medcouple").get<double>()).epsilon(0).margin(1e-9));
    CHECK(found.q1 == Approx(column.at("quartiles")[0].get<double>()));
    CHECK(found.median == Approx(column.at("quartiles")[1].get<double>()));
    CHECK(found.q3 == Approx(column.at("quartiles")[2].get<double>()));
  }
}

TEST_CASE("survey: facts count zeros, negatives, missing and distinct values", "[survey][unit]") {
  const ColumnProfile found =
      profile_numbers("x", {0.0, -2.5, kMissing, -0.0, 4.0, 4.0, kMissing, 1.5}, std::pair{-10.0, INFINITY});
  CHECK(found.n_missing == 2);
  CHECK(found.facts.n == 6);
  CHECK(found.facts.n_zero == 2);
  CHECK(found.facts.n_negative == 1);
  CHECK(found.facts.n_distinct == 4);
  CHECK(found.facts.min == -2.5);
  CHECK(found.facts.max == 4.0);
  CHECK(found.facts.resolution == 0.1);
  CHECK_FALSE(found.facts.whole);
  CHECK(found.facts.lower_bound == -10.0);
  CHECK_FALSE(found.facts.upper_bound);
  CHECK_FALSE(found.box_cox_lambda);
  CHECK(has_note(found, "missing on 2 of 8 rows"));
}

TEST_CASE("survey: knots of splines stand at the stated quantiles", "[survey][unit]") {
  std::vector<double> x;
  for (int i = 0; i <= 100; ++i) x.push_back(i);
  const ColumnProfile found = profile_numbers("x", x, std::nullopt);
  for (const std::size_t n_knots : {3U, 4U, 5U}) {
    const auto probabilities = forms::spline_probabilities(n_knots);
    REQUIRE(found.facts.spline_knots.at(n_knots).size() == n_knots);
    for (std::size_t i = 0; i < n_knots; ++i)
      CHECK(found.facts.spline_knots.at(n_knots)[i] == Approx(100.0 * probabilities[i]));
  }
}

TEST_CASE("survey: each form that can be taken carries the skewness that it leaves", "[survey][reference]") {
  // tests/reference/cases/case_02 and case_09: skewness of transformed columns by SciPy 1.10.1.
  const auto trees = testing::read_json("cases/case_02.json");
  const auto girth = profile_numbers("girth", trees["input"]["data"]["girth"], std::nullopt);
  const double of_ln = trees["output"]["describe"]["terms"]["ln(girth)"]["skew_G1"];
  REQUIRE(trial(girth, "ln(girth)"));
  CHECK(*trial(girth, "ln(girth)")->skewness_after == Approx(of_ln));
  const auto cars = testing::read_json("cases/case_09.json");
  const auto disp = profile_numbers("disp", cars["input"]["data"]["disp"], std::nullopt);
  const double of_reciprocal = cars["output"]["describe"]["terms"]["reciprocal(disp)"]["skew_G1"];
  CHECK(*trial(disp, "1/disp")->skewness_after == Approx(of_reciprocal));
}

TEST_CASE("survey: forms that zeros rule out carry the reason and the repair", "[survey][unit]") {
  const ColumnProfile found = profile_numbers("rain", {0, 0, 1, 2, 3, 5, 9, 30, 2, 1}, std::nullopt);
  const FormTrial* ln = trial(found, "ln(rain)");
  REQUIRE(ln);
  CHECK_FALSE(ln->possible);
  CHECK_FALSE(ln->skewness_after);
  CHECK_FALSE(ln->suggested);
  CHECK(ln->reason.find("0") != std::string::npos);
  CHECK(ln->repair.find("shift") != std::string::npos);
  const FormTrial* shifted = trial(found, "ln(rain + 1)");
  REQUIRE(shifted);
  CHECK(shifted->possible);
  CHECK(shifted->suggested);
  CHECK(shifted->why.find("common practice") != std::string::npos);
  CHECK(trial(found, "√(rain)")->suggested);
}

TEST_CASE("survey: a form is listed once and suggested forms are possible ones", "[survey][property]") {
  const auto columns = testing::column_statistics();
  for (const auto& [name, column] : columns.items()) {
    INFO(name);
    const ColumnProfile found = profile_numbers("x", testing::values_of(column), std::nullopt);
    std::size_t n_suggested = 0;
    for (std::size_t i = 0; i < found.forms.size(); ++i) {
      const FormTrial& t = found.forms[i];
      INFO(t.label);
      for (std::size_t j = 0; j < i; ++j) CHECK_FALSE(found.forms[j].form == t.form);
      CHECK(t.possible == t.skewness_after.has_value());
      CHECK((t.possible || !t.reason.empty()));
      if (t.suggested) {
        CHECK(t.possible);
        CHECK_FALSE(t.why.empty());
        ++n_suggested;
      }
    }
    CHECK(trial(found, "x")->suggested);
    CHECK(n_suggested >= 1);
  }
}

TEST_CASE("survey: the suggestions are the default menu less its near-equal forms", "[survey][property]") {
  std::vector<double> narrow;
  for (int i = 0; i < 40; ++i) narrow.push_back(500.0 + 0.1 * i);
  const ColumnProfile found = profile_numbers("x", narrow, std::nullopt);
  CHECK(trial(found, "x")->suggested);
  const FormTrial* ln = trial(found, "ln(x)");
  REQUIRE(ln);
  CHECK(ln->possible);
  CHECK_FALSE(ln->suggested);
  CHECK(ln->reason.find("one form with x") != std::string::npos);
  CHECK(has_note(found, "range rule, Weisberg"));
}

TEST_CASE("survey: a left-skewed column is offered its reflection at the declared bound", "[survey][unit]") {
  const std::vector<double> fill = {97, 99, 95, 98, 90, 99, 96, 80, 94, 60, 99, 98, 97, 85};
  const ColumnProfile bounded = profile_numbers("fill", fill, std::pair{0.0, 100.0});
  CHECK(bounded.direction == "left");
  REQUIRE(trial(bounded, "√(101 − fill)"));
  CHECK(trial(bounded, "√(101 − fill)")->suggested);
  CHECK(trial(bounded, "ln(101 − fill)")->suggested);
  CHECK_FALSE(trial(bounded, "ln(fill)")->suggested);
  const ColumnProfile unbounded = profile_numbers("fill", fill, std::nullopt);
  CHECK(trial(unbounded, "√(100 − fill)"));
}

TEST_CASE("survey: advice follows the log rule and says when the skewness speaks against it", "[survey][unit]") {
  const std::vector<double> skewed = {1, 2, 2, 3, 3, 3, 4, 5, 6, 8, 11, 16, 25, 40};
  CHECK(has_note(profile_numbers("x", skewed, std::nullopt), "40 times its smallest, beyond 10"));
  CHECK_FALSE(has_note(profile_numbers("x", skewed, std::nullopt), "more skewed"));
  std::vector<double> even;
  for (int i = 1; i <= 60; ++i) even.push_back(i);
  CHECK(has_note(profile_numbers("x", even, std::nullopt), "ln would make it more skewed"));
  CHECK_FALSE(has_note(profile_numbers("x", {-1.0, 5.0, 200.0}, std::nullopt), "log rule"));
  CHECK(has_note(profile_numbers("x", {1e-300, 1.0, 1e300}, std::nullopt), "10^600 times"));
}

TEST_CASE("survey: skewness that rests on few rows is said", "[survey][unit]") {
  std::vector<double> x;
  for (int i = 0; i < 40; ++i) x.push_back(100.0 + i);
  x.push_back(900.0);
  const ColumnProfile found = profile_numbers("x", x, std::nullopt);
  CHECK(found.skew == forms::SkewClass::severe);
  CHECK(found.direction == "right");
  CHECK(found.n_outlying == 1);
  CHECK(has_note(found, "rests on few rows"));
}

TEST_CASE("survey: constant and empty columns are set aside with the reason first", "[survey][unit]") {
  const ColumnProfile constant = profile_numbers("x", {3.5, 3.5, kMissing, 3.5}, std::nullopt);
  CHECK(constant.set_aside);
  CHECK(constant.notes.at(0) == "it holds one value only, 3.5");
  CHECK(constant.facts.skewness == 0.0);
  CHECK(constant.forms.empty());
  const ColumnProfile empty = profile_numbers("x", {kMissing, kMissing}, std::nullopt);
  CHECK(empty.set_aside);
  CHECK(empty.notes.at(0) == "it has no values");
  CHECK(empty.n_missing == 2);
  CHECK(profile_numbers("x", {}, std::nullopt).set_aside);
}

TEST_CASE("survey: a column of two values keeps identity alone", "[survey][unit]") {
  const ColumnProfile found = profile_numbers("x", {0, 1, 1, 0, 0, 0, 1, 0}, std::nullopt);
  CHECK_FALSE(found.set_aside);
  REQUIRE(found.forms.size() == 1);
  CHECK(found.forms[0].suggested);
}

TEST_CASE("survey: profile of numbers is finite at the ends of the number range", "[survey][unit]") {
  const ColumnProfile found =
      profile_numbers("x", {1e-300, 3e-300, 1e-200, 1.0, 2.0, 5e299, 1e300, 2e300}, std::nullopt);
  for (const double figure : {found.mean, found.sd, found.q1, found.median, found.q3, found.facts.skewness,
                              found.excess_kurtosis, found.medcouple, *found.box_cox_lambda})
    CHECK(std::isfinite(figure));
  CHECK_FALSE(trial(found, "x²")->possible);
  CHECK(trial(found, "ln(x)")->possible);
}

TEST_CASE("survey: too few values for a moment are said", "[survey][unit]") {
  CHECK(has_note(profile_numbers("x", {1.0, 4.0}, std::nullopt), "too few values for a skewness"));
  CHECK(has_note(profile_numbers("x", {1.0, 4.0, 5.0}, std::nullopt), "excess kurtosis"));
}

TEST_CASE("survey: a response is offered response forms and never set aside", "[survey][unit]") {
  Options options;
  options.response = "y";
  const auto found =
      profile(table_of({numbers("x", {1, 2, 3, 4, 5, 6}), numbers("y", {2, 9, 4, 11, 30, 80})}), options);
  REQUIRE(found);
  const ColumnProfile& y = found->columns.at(1);
  CHECK(trial(y, "y²"));
  CHECK(trial(y, "ln(y)")->suggested);
  const FormTrial* exponential = trial(y, "exp(y)");
  REQUIRE(exponential);
  CHECK(exponential->possible);
  CHECK_FALSE(exponential->suggested);
  const auto constant = profile(table_of({numbers("x", {1, 2, 3}), numbers("y", {2, 2, 2})}), options);
  CHECK_FALSE(constant->columns.at(1).set_aside);
  CHECK(has_note(constant->columns.at(1), "one value only"));
}

TEST_CASE("survey: the profile is the same for any number of threads", "[survey][property]") {
  std::vector<table::Column> columns;
  const auto statistics = testing::column_statistics();
  for (const auto& [name, column] : statistics.items()) {
    auto values = testing::values_of(column);
    values.resize(400, kMissing);
    columns.push_back(numbers(name, values));
  }
  const table::Table table = table_of(columns);
  Options one;
  one.threads = 1;
  Options many;
  many.threads = 4;
  const auto a = profile(table, one);
  const auto b = profile(table, many);
  REQUIRE(a->columns.size() == b->columns.size());
  for (std::size_t i = 0; i < a->columns.size(); ++i) {
    CHECK(a->columns[i].facts.name == b->columns[i].facts.name);
    CHECK(a->columns[i].facts.skewness == b->columns[i].facts.skewness);
    CHECK(a->columns[i].medcouple == b->columns[i].medcouple);
    CHECK(a->columns[i].box_cox_lambda == b->columns[i].box_cox_lambda);
    CHECK(a->columns[i].notes == b->columns[i].notes);
  }
}

}  // namespace
}  // namespace formsieve::survey

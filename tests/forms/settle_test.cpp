// Requests of a plan settled for a column: anchors, shifts, knots, and what is refused.
#include "facts.hpp"

#include <catch2/catch.hpp>

#include <cmath>

using namespace formsieve::forms;
using namespace formsieve::forms::tests;

namespace {

Form settled(const Request& request, const ColumnFacts& facts) {
  const auto form = settle(request, facts);
  INFO((form ? "" : form.error().message));
  REQUIRE(form.ok());
  return *form;
}

formsieve::Error refused(const Request& request, const ColumnFacts& facts) {
  const auto form = settle(request, facts);
  REQUIRE_FALSE(form.ok());
  CHECK(form.error().kind == formsieve::ErrorKind::plan);
  CHECK(form.error().where == "column '" + facts.name + "'");
  return form.error();
}

}  // namespace

TEST_CASE("forms: an automatic reflection is one unit beyond the bound or the largest value", "[forms][unit]") {
  const Request request{.form = "sqrt", .reflect_auto = true};
  ColumnFacts facts = facts_of(12, 97, -1.5);
  facts.whole = true;
  facts.resolution = 1.0;
  CHECK(settled(request, facts).reflect == 98.0);  // no bound: largest value plus 1
  facts.upper_bound = 100.0;
  CHECK(settled(request, facts).reflect == 101.0);  // whole numbers: bound plus 1
  facts.whole = false;
  facts.resolution = 0.1;
  CHECK(settled(request, facts).reflect == 100.1);  // bound plus one unit of the resolution
  facts.upper_bound = 0.7;
  CHECK(settled(request, facts).reflect == 0.8);  // and not 0.7 + 0.1 = 0.7999999999999999
  facts.upper_bound.reset();
  facts.max = 96.4;
  CHECK(settled(request, facts).reflect == 97.4);
}

TEST_CASE("forms: an automatic shift makes the smallest value 1, or 0 for roots", "[forms][unit]") {
  const ColumnFacts facts = facts_of(-3.7, 20.0, 1.0, 2, 30);
  CHECK(settled({.form = "ln", .shift_auto = true}, facts).shift == 4.7);
  CHECK(settled({.form = "reciprocal-square", .shift_auto = true}, facts).shift == 4.7);
  CHECK(settled({.form = "box-cox", .parameters = {0.3}, .shift_auto = true}, facts).shift == 4.7);
  CHECK(settled({.form = "power", .parameters = {-1.5}, .shift_auto = true}, facts).shift == 4.7);
  CHECK(settled({.form = "sqrt", .shift_auto = true}, facts).shift == 3.7);
  CHECK(settled({.form = "power", .parameters = {0.3}, .shift_auto = true}, facts).shift == 3.7);
  CHECK(settled({.form = "square", .shift_auto = true}, facts).shift == 0.0);
  CHECK(settled({.form = "ln", .shift_auto = true}, facts_of(0.7, 3, 0)).shift == 0.3);  // not 0.30000000000000004

  const Form both = settled({.form = "ln", .reflect_auto = true, .shift_auto = true}, facts);
  CHECK(both.reflect == 21.0);
  CHECK(both.shift == 0.0);
  CHECK(settled({.form = "ln", .reflect = 30.0, .shift_auto = true}, facts).shift == -9.0);
}

TEST_CASE("forms: an automatically settled form is defined on the whole column", "[forms][property]") {
  for (const char* form : {"sqrt", "ln", "log10", "reciprocal", "reciprocal-sqrt", "reciprocal-square", "cube-root"})
    for (const double min : {-1e9, -1946.3, -0.1, 0.0, 1e-7, 0.3, 17.77})
      for (const double range : {1e-6, 0.2, 12.34, 1e7})
        for (const bool reflect : {false, true})
          for (const double resolution : {0.0, 1e-15, 0.01, 1.0}) {
            ColumnFacts facts = facts_of(min, min + range, 1.0);
            facts.resolution = resolution;
            const Form settled_form = settled({.form = form, .reflect_auto = reflect, .shift_auto = true}, facts);
            INFO(label(settled_form, "x") << " on " << facts.min << " to " << facts.max);
            CHECK(domain(settled_form).contains(facts.min));
            CHECK(domain(settled_form).contains(facts.max));
          }
}

TEST_CASE("forms: what cannot be settled is refused with what to write", "[forms][unit]") {
  const ColumnFacts facts = facts_of(1, 10, 1);
  CHECK(refused({.form = "recipricol"}, facts).hint == "did you mean 'reciprocal'?");
  CHECK(refused({.form = "sqroot"}, facts).hint == "did you mean 'sqrt'?");
  CHECK(refused({.form = "log"}, facts).hint == "did you mean 'ln'?");
  CHECK(refused({.form = "cbrt"}, facts).hint == "did you mean 'cube-root'?");
  CHECK(refused({.form = "zzzzzzzzzz"}, facts).hint == "formsieve help forms lists them all");
  CHECK(refused({.form = "power"}, facts).message == "'power' takes one parameter, the power; 0 given");
  CHECK(refused({.form = "ln", .parameters = {2.0}}, facts).message == "'ln' takes no parameter; 1 given");
  CHECK(refused({.form = "fractional-polynomial", .parameters = {1.0}}, facts).hint ==
        "write { form = \"fractional-polynomial\", parameter = [0, 2] }");
  CHECK(refused({.form = "box-cox", .parameters = {std::nan("")}}, facts).message ==
        "a parameter of 'box-cox' is not a finite number");
  CHECK(refused({.form = "power", .parameters = {0.0}}, facts).hint.find("'ln'") != std::string::npos);
  CHECK(refused({.form = "ln", .shift = HUGE_VAL}, facts).message.find("finite") != std::string::npos);
  CHECK(refused({.form = "levels"}, facts).message.find("text columns") != std::string::npos);
  CHECK(refused({.form = "ln"}, text_facts()).message.find("holds text") != std::string::npos);
}

TEST_CASE("forms: a spline takes its knots from the column's quantiles", "[forms][unit]") {
  ColumnFacts facts = facts_of(0, 10, 1);
  facts.spline_knots = {{3, {1.0, 4.0, 9.0}}, {4, {1.0, 2.0, 2.0, 9.0}}};
  CHECK(settled({.form = "spline", .parameters = {3.0}}, facts).parameters == std::vector<double>{1, 4, 9});
  CHECK(settled({.form = "spline", .parameters = {3.0}, .reflect = 11.0, .shift = 1.0}, facts).parameters ==
        std::vector<double>{3, 8, 11});
  CHECK(refused({.form = "spline", .parameters = {4.0}}, facts).message.find("too few distinct") != std::string::npos);
  CHECK(refused({.form = "spline", .parameters = {5.0}}, facts).message.find("too few distinct") != std::string::npos);
  CHECK(refused({.form = "spline", .parameters = {6.0}}, facts).message == "a spline has 3, 4 or 5 knots; 6 asked for");
  for (const std::size_t k : {3u, 4u, 5u}) CHECK(spline_probabilities(k).size() == k);
  CHECK(spline_probabilities(6).empty());
}

TEST_CASE("forms: rare levels are pooled and keep their own names in the record", "[forms][unit]") {
  const ColumnFacts facts = text_facts();
  const Form pooled = settled({.form = "levels", .rare_level_count = 5}, facts);
  CHECK(pooled.levels == std::vector<std::string>{"north", "south", "east", "other levels (2)"});
  CHECK(pooled.pooled == std::vector<std::string>{"west", "quay"});
  CHECK(label(pooled, "site", 2) == "site = other levels (2)");
  CHECK(settled({.form = "levels"}, facts).levels == facts.levels);
  // A single rare level keeps its name, since a pool of one would only hide it.
  CHECK(settled({.form = "levels", .rare_level_count = 3}, facts).levels == facts.levels);
}

TEST_CASE("forms: a form from a file is checked before it is used", "[forms][unit]") {
  CHECK(check({.kind = Kind::ln}).ok());
  CHECK(check({.kind = Kind::power, .parameters = {0.5}}).ok());
  CHECK(check({.kind = Kind::spline, .parameters = {1, 2, 4}}).ok());
  CHECK(check({.kind = Kind::levels, .levels = {"a", "b"}}).ok());
  const std::vector<Form> broken{{.kind = Kind::power},
                                 {.kind = Kind::ln, .parameters = {1}},
                                 {.kind = Kind::box_cox, .parameters = {std::nan("")}},
                                 {.kind = Kind::ln, .shift = HUGE_VAL},
                                 {.kind = Kind::fractional_polynomial, .parameters = {1}},
                                 {.kind = Kind::spline, .parameters = {1, 2}},
                                 {.kind = Kind::spline, .parameters = {1, 3, 3}},
                                 {.kind = Kind::levels}};
  for (const Form& form : broken) {
    const formsieve::Status status = check(form);
    REQUIRE_FALSE(status.ok());
    CHECK(status.error().kind == formsieve::ErrorKind::data);
  }
}

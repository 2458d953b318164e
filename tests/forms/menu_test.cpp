// Default menus for each class of column in design.md, and what is struck or merged.
#include "facts.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>

using namespace formsieve::forms;
using namespace formsieve::forms::tests;

namespace {

using Labels = std::vector<std::string>;

Labels labels(const Menu& menu, const std::string& column = "x") {
  Labels all;
  for (const MenuEntry& entry : menu.entries) {
    CHECK_FALSE(entry.why.empty());
    all.push_back(term_name(entry.form, column));
  }
  return all;
}

const Struck* struck(const Menu& menu, const std::string& label) {
  for (const Struck& one : menu.struck)
    if (one.label == label) return &one;
  return nullptr;
}

Menu admitted(const std::vector<Form>& forms, const ColumnFacts& facts, bool response = false) {
  std::vector<MenuEntry> wanted;
  for (const Form& form : forms) wanted.push_back({form, "asked for"});
  return admissible(wanted, facts, response);
}

}  // namespace

TEST_CASE("forms: skewness classes turn at 0.5, 1 and 2 on either side", "[forms][unit]") {
  CHECK(skew_class(0.49) == SkewClass::none);
  CHECK(skew_class(-0.5) == SkewClass::mild);
  CHECK(skew_class(1.0) == SkewClass::mild);
  CHECK(skew_class(-1.01) == SkewClass::moderate);
  CHECK(skew_class(2.0) == SkewClass::moderate);
  CHECK(skew_class(2.01) == SkewClass::severe);
  CHECK(skew_class(std::nan("")) == SkewClass::none);
}

TEST_CASE("forms: a positive column gets identity, sqrt, ln and reciprocal", "[forms][unit]") {
  const Menu menu = default_menu(facts_of(2, 900, 1.4), 5);
  CHECK(labels(menu) == Labels{"x", "√(x)", "ln(x)", "1/x"});
  CHECK(menu.entries[2].why.find("common practice") != std::string::npos);  // moderate: ln first
  CHECK(menu.entries[1].why.find("common practice") == std::string::npos);
  CHECK(labels(default_menu(facts_of(2, 9, 0.1), 5)) == Labels{"x", "√(x)", "ln(x)", "1/x"});
  ColumnFacts bounded = facts_of(2, 9, 0.1);
  CHECK(default_menu(bounded, 5).entries[2].why.find("cannot be scored") == std::string::npos);
  bounded.lower_bound = 0.0;  // zeros may come, though none was seen
  CHECK(default_menu(bounded, 5).entries[2].why.find("cannot be scored") != std::string::npos);
}

TEST_CASE("forms: zeros admit sqrt and a shifted ln, and the rest is said with its repair", "[forms][unit]") {
  const Menu menu = default_menu(facts_of(0, 40, 1.4, 12), 5);
  CHECK(labels(menu) == Labels{"x", "√(x)", "ln(x + 1)"});
  REQUIRE(struck(menu, "ln(x)"));
  CHECK(struck(menu, "ln(x)")->repair == "write { form = \"ln\", shift = \"auto\" }");
  CHECK(struck(menu, "1/x"));
}

TEST_CASE("forms: a left-skewed column gets reflected forms instead of those of the raw column", "[forms][unit]") {
  ColumnFacts facts = facts_of(12, 97, -1.3);
  facts.whole = true;
  facts.resolution = 1.0;
  facts.upper_bound = 100.0;
  CHECK(labels(default_menu(facts, 5)) == Labels{"x", "√(101 − x)", "ln(101 − x)"});
  facts.skewness = -2.4;
  CHECK(labels(default_menu(facts, 5)) == Labels{"x", "√(101 − x)", "ln(101 − x)", "1/(101 − x)"});
  facts.upper_bound.reset();
  CHECK(labels(default_menu(facts, 5)) == Labels{"x", "√(98 − x)", "ln(98 − x)", "1/(98 − x)"});
}

TEST_CASE("forms: a share adds the logit when strictly inside and arcsine-sqrt otherwise", "[forms][unit]") {
  CHECK(labels(default_menu(facts_of(0.05, 0.95, 0.1), 5)) == Labels{"x", "√(x)", "ln(x)", "1/x", "logit(x)"});
  const Menu edge = default_menu(facts_of(0.0, 0.95, 0.1, 3), 5);
  CHECK(labels(edge) == Labels{"x", "√(x)", "ln(x + 1)", "arcsin(√(x))"});
  REQUIRE(struck(edge, "logit(x)"));
  CHECK(struck(edge, "logit(x)")->repair.find("arcsine-sqrt") != std::string::npos);
  ColumnFacts left = facts_of(0.2, 1.0, -0.8);
  left.upper_bound = 1.0;
  CHECK(labels(default_menu(left, 5)) == Labels{"x", "√(1.01 − x)", "ln(1.01 − x)", "arcsin(√(x))"});
  ColumnFacts other = facts_of(0.05, 0.95, 0.1);
  other.upper_bound = 3.0;  // declared to reach beyond 1: not a share
  CHECK(labels(default_menu(other, 5)) == Labels{"x", "√(x)", "ln(x)", "1/x"});
}

TEST_CASE("forms: a signed column gets Yeo-Johnson and a cube root only when skewed", "[forms][unit]") {
  CHECK(labels(default_menu(facts_of(-20, 31, 0.2, 0, 80), 5)) == Labels{"x"});
  CHECK(labels(default_menu(facts_of(-20, 90, 1.2, 0, 80), 5)) == Labels{"x", "YJ(x; 0)", "∛(x)"});
  CHECK(labels(default_menu(facts_of(-90, 20, -1.2, 0, 80), 5)) == Labels{"x", "YJ(x; 2)", "∛(x)"});
}

TEST_CASE("forms: two values or one leave identity alone", "[forms][unit]") {
  ColumnFacts facts = facts_of(0, 1, 3.0, 150);
  facts.n_distinct = 2;
  CHECK(labels(default_menu(facts, 5)) == Labels{"x"});
  CHECK(labels(default_response_menu(facts)) == Labels{"x"});
  facts.n_distinct = 1;
  CHECK(labels(default_menu(facts, 5)) == Labels{"x"});
}

TEST_CASE("forms: a text column gets level indicators with rare levels pooled", "[forms][unit]") {
  const Menu menu = default_menu(text_facts(), 5);
  REQUIRE(menu.entries.size() == 1);
  CHECK(n_columns(menu.entries[0].form) == 3);
  CHECK(menu.entries[0].why.find("north") != std::string::npos);
  ColumnFacts one = text_facts();
  one.levels = {"north"};
  one.level_counts = {111};
  CHECK(default_menu(one, 5).entries.empty());
  CHECK(default_menu(one, 5).struck.size() == 1);
}

TEST_CASE("forms: the default response forms follow the sign and skewness of the response", "[forms][unit]") {
  CHECK(labels(default_response_menu(facts_of(3, 900, 1.2))) == Labels{"x", "√(x)", "ln(x)"});
  CHECK(labels(default_response_menu(facts_of(3, 9000, 2.6))) == Labels{"x", "√(x)", "ln(x)", "1/x"});
  CHECK(labels(default_response_menu(facts_of(3, 900, -2.6))) == Labels{"x", "√(x)", "ln(x)"});
  CHECK(labels(default_response_menu(facts_of(-30, 900, 1.2, 0, 9))) == Labels{"x", "YJ(x; 0)"});
  const Menu zeros = default_response_menu(facts_of(0, 900, 1.2, 4));
  CHECK(labels(zeros) == Labels{"x", "√(x + 0.005)"});
  REQUIRE(struck(zeros, "ln(x)"));
  CHECK(struck(zeros, "ln(x)")->why.find("zeros") != std::string::npos);
}

TEST_CASE("forms: every form of a default menu can be used on its column", "[forms][property]") {
  for (const double min : {-50.0, 0.0, 0.001, 0.3, 12.0})
    for (const double max : {0.6, 1.0, 40.0, 1e7})
      for (const double skewness : {-3.0, -1.5, -0.7, 0.0, 0.7, 1.5, 3.0}) {
        const ColumnFacts facts =
            facts_of(min, std::fmax(max, min + 1.0), skewness, min == 0.0 ? 5 : 0, min < 0.0 ? 5 : 0);
        for (const bool response : {false, true}) {
          const Menu menu = response ? default_response_menu(facts) : default_menu(facts, 5);
          REQUIRE_FALSE(menu.entries.empty());
          CHECK(menu.entries[0].form == Form{});
          for (const MenuEntry& entry : menu.entries)
            for (const double x : {facts.min, facts.max}) {
              INFO(label(entry.form, "x") << " at " << x);
              CHECK(std::isfinite(evaluate(entry.form, x)));
              if (response) CHECK(std::isfinite(log_abs_derivative(entry.form, x)));
            }
        }
      }
}

TEST_CASE("forms: an undefined form is struck with the shift that would admit it", "[forms][unit]") {
  const Menu menu = admitted({{.kind = Kind::ln},
                              {.kind = Kind::sqrt},
                              {.kind = Kind::logit},
                              {.kind = Kind::exp},
                              {.kind = Kind::power, .parameters = {-0.5}}},
                             facts_of(-2.5, 900, 1, 0, 3));
  CHECK(menu.entries.empty());
  REQUIRE(struck(menu, "ln(x)"));
  CHECK(struck(menu, "ln(x)")->why == "undefined at −2.5, the smallest value of x");
  CHECK(struck(menu, "ln(x)")->repair == "write { form = \"ln\", shift = 3.5 }");
  CHECK(struck(menu, "√(x)")->repair == "write { form = \"sqrt\", shift = 2.5 }");
  CHECK(struck(menu, "x^(−0.5)")->repair == "write { form = \"power\", parameter = -0.5, shift = 3.5 }");
  CHECK(struck(menu, "logit(x)")->repair.find("divided by 100") != std::string::npos);
  CHECK(struck(menu, "exp(x)")->why == "too large for the computer at 900, the largest value of x");

  const Menu reflected = admitted({{.kind = Kind::ln, .reflect = 500.0}}, facts_of(1, 900, 1));
  REQUIRE(reflected.struck.size() == 1);
  CHECK(reflected.struck[0].why == "undefined at 900, the largest value of x");
  CHECK(reflected.struck[0].repair == "write { form = \"ln\", reflect = 500, shift = 401 }");
}

TEST_CASE("forms: every repair that is a plan entry admits the form", "[forms][property]") {
  for (const Kind kind : {Kind::ln, Kind::sqrt, Kind::reciprocal, Kind::reciprocal_square})
    for (const std::optional<double> reflect : {std::optional<double>{}, std::optional<double>{3.3}}) {
      const ColumnFacts facts = facts_of(-7.13, 11.9, 1, 0, 9);
      const Menu menu = admitted({{.kind = kind, .reflect = reflect}}, facts);
      REQUIRE(menu.struck.size() == 1);
      const std::string& repair = menu.struck[0].repair;
      const double shift = std::strtod(repair.c_str() + repair.find("shift = ") + 8, nullptr);
      CHECK(admitted({{.kind = kind, .reflect = reflect, .shift = shift}}, facts).entries.size() == 1);
    }
}

TEST_CASE("forms: equal forms are merged into the simpler and the merge is said", "[forms][unit]") {
  const Menu menu = admitted({{.kind = Kind::log10},
                              {.kind = Kind::power, .parameters = {0.5}},
                              {.kind = Kind::ln},
                              {.kind = Kind::sqrt},
                              {.kind = Kind::box_cox, .parameters = {0.0}},
                              {.kind = Kind::ln}},
                             facts_of(1, 90, 1));
  CHECK(labels(menu) == Labels{"ln(x)", "√(x)"});
  CHECK(menu.merged.size() == 4);
  const auto dropped = [&](const std::string& label) {
    return std::any_of(menu.merged.begin(), menu.merged.end(),
                       [&](const Merged& one) { return one.dropped == label && !one.why.empty(); });
  };
  CHECK(dropped("log10(x)"));
  CHECK(dropped("x^0.5"));
  CHECK(menu.merged[0].kept == "ln(x)");
}

TEST_CASE("forms: Yeo-Johnson of a column of one sign is a shifted Box-Cox form", "[forms][unit]") {
  const Form bent{.kind = Kind::yeo_johnson, .parameters = {0.0}}, ln1{.kind = Kind::ln, .shift = 1.0};
  CHECK(labels(admitted({bent, ln1}, facts_of(0, 90, 1, 4))) == Labels{"ln(x + 1)"});
  CHECK(labels(admitted({bent, ln1}, facts_of(-0.5, 90, 1, 4, 2))) == Labels{"YJ(x; 0)", "ln(x + 1)"});
}

TEST_CASE("forms: two values make every form the same, and too few values forbid forms of several columns",
          "[forms][unit]") {
  ColumnFacts facts = facts_of(1, 2, 0);
  facts.n_distinct = 2;
  const Menu menu = admitted({{.kind = Kind::ln}, {.kind = Kind::identity}, {.kind = Kind::quadratic}}, facts);
  CHECK(labels(menu) == Labels{"x"});
  CHECK(menu.merged.size() == 1);
  CHECK(menu.struck.size() == 1);
}

TEST_CASE("forms: a response form must turn back, stay on one branch and have a finite slope", "[forms][unit]") {
  const ColumnFacts signed_facts = facts_of(-4, 9, 0, 0, 30), zeros = facts_of(0, 9, 1, 3),
                    positive = facts_of(1, 9, 0);
  CHECK(admitted({{.kind = Kind::quadratic}}, positive, true).entries.empty());
  CHECK(admitted({{.kind = Kind::square}}, positive, true).entries.size() == 1);
  CHECK(admitted({{.kind = Kind::square}}, zeros, true).entries.size() == 1);
  const Menu square = admitted({{.kind = Kind::square}}, signed_facts, true);
  REQUIRE(square.struck.size() == 1);
  CHECK(square.struck[0].repair == "write { form = \"square\", shift = 4 }");
  CHECK(admitted({{.kind = Kind::square}}, signed_facts, false).entries.size() == 1);
  CHECK(admitted({{.kind = Kind::cube}}, signed_facts, true).entries.size() == 1);

  const Menu root = admitted({{.kind = Kind::sqrt}}, zeros, true);
  REQUIRE(root.struck.size() == 1);
  CHECK(root.struck[0].why.find("infinitely steep") == 0);
  CHECK(root.struck[0].repair == "write { form = \"sqrt\", shift = 0.005 }");
  CHECK(admitted({{.kind = Kind::sqrt, .shift = 0.005}}, zeros, true).entries.size() == 1);
  CHECK(admitted({{.kind = Kind::cube_root}}, facts_of(-4, 9, 0, 1, 30), true).entries.empty());
  CHECK(admitted({{.kind = Kind::cube_root}}, signed_facts, true).entries.size() == 1);
}

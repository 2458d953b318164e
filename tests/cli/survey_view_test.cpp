#include "lines.hpp"
#include "samples.hpp"
#include "survey_view.hpp"

#include <catch2/catch.hpp>

using namespace formsieve::cli;
using namespace formsieve::cli::testing;

TEST_CASE("cli: the survey fits every width from 40 columns on", "[cli][unit]") {
  for (const std::size_t width : {40U, 48U, 56U, 60U, 72U, 80U, 100U, 132U, 200U}) {
    CAPTURE(width);
    CHECK(widest_line(survey_page(samples::survey(), plain_terminal(width))) <= width);
  }
}

TEST_CASE("cli: a wide survey holds every figure of a column in one line", "[cli][unit]") {
  const std::string page = survey_page(samples::survey(), plain_terminal(160));
  CHECK(has(page,
            "floor_area    1,420        0      0     120.5  812   1,903  4,120   48,210   2.42  right, severe         "
            "31  x, √(x), ln(x)\n"));
  CHECK(has(page, "site_code     1,420        0      0         7    7       7      7        7   0.00  none       "));
}

TEST_CASE("cli: counts that are zero in every column are said once instead of shown", "[cli][unit]") {
  const std::string page = survey_page(samples::survey(), plain_terminal(160));
  CHECK(has(page, "No column of numbers has negative values."));
  CHECK_FALSE(has(lines_of(page)[2], "negative"));
}

TEST_CASE("cli: the survey gives each form's skewness, why, and what would admit it", "[cli][unit]") {
  const std::string page = survey_page(samples::survey(), plain_terminal(100));
  CHECK(has(page, "suggested      x 2.42 · √(x) 1.10 · ln(x) −0.04\n"));
  CHECK(has(page, "also possible  ∛(x) 0.80\n"));
  CHECK(has(page, "√(x), ln(x): positive and right-skewed (common practice)"));
  CHECK(has(page, "ln(x): 3 zeros; a shift, as in { form = \"ln\", shift = \"auto\" }"));
  CHECK(has(page, "site_code: set aside"));
  CHECK(has(unwrapped(page), "the suggestions are common practice"));
}

TEST_CASE("cli: columns of text are shown by their levels", "[cli][unit]") {
  const std::string page = unwrapped(survey_page(samples::survey(), plain_terminal(80)));
  CHECK(has(page, "region 1,420 0 7 north coast 600, hills 400, river 200,"));
  CHECK(has(page, "border 38, 1 more"));
  CHECK(has(page, "Levels on fewer than 5 rows are pooled into one."));
}

TEST_CASE("cli: a narrow survey says in words what the table said", "[cli][unit]") {
  const std::string page = unwrapped(survey_page(samples::survey(), plain_terminal(40)));
  CHECK(has(page, "floor_area 1,420 values, 0 missing from 120.5 to 48,210; median 1,903, quartiles 812 and 4,120"));
  CHECK(has(page, "skewness: left, moderate (G1 −1.31); 12 outlying"));
}

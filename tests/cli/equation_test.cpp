// formsieve equation, run as a user runs it.
#include "lines.hpp"
#include "process.hpp"
#include "tables.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstdlib>

using namespace formsieve::cli::testing;

namespace {

const Folder& stores() {
  static const Folder folder;
  static const Outcome searched = [] {
    folder.write("stores.csv", stores_csv());
    return run_formsieve({"search", folder.file("stores.csv"), "--response", "energy_kwh", "--ignore",
                          "region,door_openings", "--out", folder.file("stores.run")});
  }();
  REQUIRE(searched.exit_code == 0);
  return folder;
}

Outcome equation(std::vector<std::string> more, const std::string& rank = "recommended") {
  more.insert(more.begin(), {"equation", stores().file("stores.run"), rank});
  return run_formsieve(more);
}

}  // namespace

TEST_CASE("cli: equation prints text unless another language is asked for", "[cli][unit]") {
  const Outcome text = equation({});
  CHECK(text.exit_code == 0);
  CHECK(text.err.empty());
  CHECK(text.out.starts_with("energy_kwh = "));
  CHECK(equation({"--as", "text"}).out == text.out);
  for (const auto& [language, start] :
       std::vector<std::pair<std::string, std::string>>{{"spreadsheet", "\t=IFERROR("},
                                                        {"sql", "FROM your_table"},
                                                        {"c", "double mean_of_energy_kwh("},
                                                        {"python", "def mean_of_energy_kwh("}}) {
    const Outcome outcome = equation({"--as", language});
    CAPTURE(language);
    CHECK(outcome.exit_code == 0);
    CHECK(has(outcome.out, start));
    CHECK(has(outcome.out, "Association is not cause"));
  }
}

TEST_CASE("cli: the equation in Python gives the mean that apply gives", "[cli][property]") {
  const Outcome code = equation({"--as", "python"});
  REQUIRE(code.exit_code == 0);
  stores().write("equation.py", code.out +
                                    "print(repr(mean_of_energy_kwh(fill_percent=80, floor_area=500)))\n"
                                    "print(repr(mean_of_energy_kwh(fill_percent=80, floor_area=None)))\n");
  const std::string out = stores().file("value.txt");
  REQUIRE(std::system(("python3 '" + stores().file("equation.py") + "' > '" + out + "'").c_str()) == 0);
  const auto printed = lines_of(stores().read("value.txt"));
  REQUIRE(printed.size() == 2);
  CHECK(printed[1] == "nan");
  stores().write("one.csv", "fill_percent,floor_area\n80,500\n");
  const Outcome applied =
      run_formsieve({"apply", stores().file("stores.run"), "recommended", stores().file("one.csv")});
  REQUIRE(applied.exit_code == 0);
  const double mean = std::stod(lines_of(applied.out).at(1));
  CHECK(std::abs(std::stod(printed[0]) - mean) <= 1e-9 * mean);  // apply prints ten digits
}

TEST_CASE("cli: equation writes a file, and over one only when told", "[cli][unit]") {
  const std::string out = stores().file("equation.sql");
  CHECK(equation({"--as", "sql", "--out", out}).exit_code == 0);
  CHECK(stores().read("equation.sql") == equation({"--as", "sql"}).out);
  const Outcome again = equation({"--as", "c", "--out", out});
  CHECK(again.exit_code == 2);
  CHECK(has(again.err, "--replace"));
  CHECK(equation({"--as", "c", "--out", out, "--replace"}).exit_code == 0);
  CHECK(has(stores().read("equation.sql"), "#include <math.h>"));
}

TEST_CASE("cli: equation says what is wrong and what to type", "[cli][unit]") {
  const auto refused = [](const Outcome& outcome, const std::string& what, const std::string& fix) {
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 2);
    CHECK(outcome.out.empty());
    CHECK(has(outcome.err, what));
    CHECK(has(outcome.err, "\nfix: "));
    CHECK(has(outcome.err, fix));
  };
  refused(equation({"--as", "pyton"}), "'pyton' is not known", "did you mean python?");
  refused(equation({}, "99999"), "rank '99999'", "recommended");
  refused(run_formsieve({"equation", stores().file("no.run"), "1"}), "no.run", "");
  refused(run_formsieve({"equation", stores().file("stores.run")}), "needs RANK", "equation RUN RANK");
}

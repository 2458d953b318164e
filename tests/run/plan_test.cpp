#include <formsieve/run.hpp>

#include <catch2/catch.hpp>

#include <string>

using namespace formsieve;
using run::FormEntry;
using run::Plan;

namespace {

const std::string kFullPlan = FORMSIEVE_SOURCE_DIR "/tests/run/full-plan.toml";
const std::string kData = "[data]\nfile = \"a.csv\"\nresponse = \"y\"\n";

Plan parsed(const std::string& text) {
  auto plan = run::parse_plan(text, "plan.toml");
  if (!plan) FAIL(plan.error().where << ": " << plan.error().message);
  return *std::move(plan);
}

Error refused(const std::string& text) {
  const auto plan = run::parse_plan(text, "plan.toml");
  REQUIRE_FALSE(plan.ok());
  return plan.error();
}

Plan full() {
  auto plan = run::read_plan(kFullPlan);
  if (!plan) FAIL(plan.error().where << ": " << plan.error().message);
  return *std::move(plan);
}

}  // namespace

TEST_CASE("run: plan keeps every key of the data table when read", "[run][unit]") {
  const Plan plan = full();
  CHECK(plan.path == kFullPlan);
  CHECK(plan.data.file == "plant.db");
  CHECK(plan.data.query == "select * from stores");
  CHECK(plan.data.response == "energy_kwh");
  CHECK(plan.data.ignore == std::vector<std::string>{"site_id"});
  CHECK(plan.data.weight == "hours_metered");
  CHECK(plan.data.group == "operator");
  CHECK_FALSE(plan.data.order);
  CHECK_FALSE(plan.data.fold);
  REQUIRE(plan.data.bounds.size() == 2);
  CHECK(plan.data.bounds.at("fill_percent") == std::pair{0.0, 100.0});
  CHECK(plan.data.bounds.at("rain") == std::pair{0.0, std::numeric_limits<double>::infinity()});
  CHECK(plan.data.separator == "semicolon");
  CHECK(plan.data.decimal == "comma");
  CHECK(plan.data.missing == std::vector<std::string>{"", "NA", "-99"});
  CHECK(plan.data.text == std::vector<std::string>{"site_code"});
  CHECK(plan.data.rare_levels == 3);
}

TEST_CASE("run: plan keeps every key of search and rank when read", "[run][unit]") {
  const Plan plan = full();
  CHECK(plan.search.strategy == "every");
  CHECK(plan.search.max_terms == 8u);
  CHECK(plan.search.within == 2.5);
  CHECK(plan.search.folds == 5);
  CHECK(plan.search.repeats == 3);
  CHECK(plan.search.seed == 42);
  CHECK(plan.search.pool == 500);
  CHECK(plan.search.budget_seconds == 5400.0);
  CHECK(plan.rank.by == "aicc");
  CHECK(plan.rank.shortlist == 10);
  CHECK(plan.rank.near_tie == 0.05);
  CHECK(plan.rank.require == std::vector<std::string>{"equal-spread", "straightness"});
  CHECK_FALSE(plan.rank.families);
}

TEST_CASE("run: plan spreads lists of parameters and shifts into all combinations", "[run][unit]") {
  const Plan plan = full();
  const auto& rain = plan.forms.of.at("rain");
  REQUIRE(rain.size() == 5);
  CHECK(rain[0].form == "ln");
  CHECK(rain[0].shift_auto);
  CHECK_FALSE(rain[0].shift);
  const std::vector<std::pair<double, double>> expected{{-1, 1}, {-1, 2.5}, {0.3, 1}, {0.3, 2.5}};
  for (std::size_t i = 0; i < expected.size(); ++i) {
    CHECK(rain[i + 1].form == "box-cox");
    CHECK(rain[i + 1].parameters == std::vector<double>{expected[i].first});
    CHECK(rain[i + 1].shift == expected[i].second);
    CHECK_FALSE(rain[i + 1].shift_auto);
  }
}

TEST_CASE("run: plan reads reflections, powers and knots", "[run][unit]") {
  const Plan plan = full();
  const auto& fill = plan.forms.of.at("fill percent");
  REQUIRE(fill.size() == 3);
  CHECK_FALSE(fill[0].reflect_auto);
  CHECK(fill[1].reflect_auto);
  CHECK_FALSE(fill[1].reflect);
  CHECK_FALSE(fill[2].reflect_auto);
  CHECK(fill[2].reflect == 101.0);
  CHECK(plan.forms.of.at("floor_area").at(3).parameters == std::vector<double>{-0.5, 2});
  CHECK(plan.forms.of.at("throughput").at(0).parameters == std::vector<double>{4});
  CHECK(plan.forms.of.at("throughput").at(1).reflect == 7.5);
  REQUIRE(plan.forms.response);
  CHECK(plan.forms.response->size() == 3);
  REQUIRE(plan.forms.default_menu);
  CHECK(plan.forms.default_menu->at(1).form == "ln");
  CHECK(plan.forms.direction.at("fill percent") == "falling");
}

TEST_CASE("run: plan remembers where keys, columns and entries stand", "[run][unit]") {
  const Plan plan = full();
  CHECK(plan.where.at("forms.always") == kFullPlan + ":19:1");
  CHECK(plan.where.at("forms.always.floor_area") == kFullPlan + ":19:11");
  CHECK(plan.where.at("data.bounds.rain") == kFullPlan + ":9:37");
  CHECK(plan.where.at("forms.of.rain") == kFullPlan + ":25:1");
  CHECK(plan.where.at("rank.require.straightness") == kFullPlan + ":42:28");
  CHECK(plan.forms.of.at("rain").at(0).where == kFullPlan + ":25:9");
  CHECK(plan.forms.of.at("rain").at(4).where == kFullPlan + ":25:42");
  CHECK_FALSE(plan.where.contains("data.order"));
}

TEST_CASE("run: plan has the defaults of the design when it names only file and response", "[run][unit]") {
  const Plan plan = parsed(kData);
  CHECK_FALSE(plan.forms.response);
  CHECK_FALSE(plan.forms.default_menu);
  CHECK_FALSE(plan.search.max_terms);
  CHECK(plan.search.strategy == "auto");
  CHECK(plan.search.within == 4.0);
  CHECK(plan.search.folds == 10);
  CHECK(plan.search.repeats == 1);
  CHECK(plan.search.seed == 20261201);
  CHECK(plan.search.pool == 2000);
  CHECK(plan.search.budget_seconds == 28800.0);
  CHECK(plan.rank.by == "cv_rmse");
  CHECK(plan.rank.shortlist == 25);
  CHECK(plan.rank.near_tie == 0.02);
  CHECK(plan.rank.families);
  CHECK(plan.data.rare_levels == 5);
  CHECK_FALSE(plan.data.missing);
}

TEST_CASE("run: plan takes the word survey for the menus that the survey suggests", "[run][unit]") {
  const Plan plan = parsed(kData + "[forms]\nresponse = \"survey\"\ndefault = \"survey\"\n");
  CHECK_FALSE(plan.forms.response);
  CHECK_FALSE(plan.forms.default_menu);
}

TEST_CASE("run: plan accepts the edges of every range", "[run][unit]") {
  const Plan plan =
      parsed(kData +
             "missing = []\nrare_levels = 0\n[search]\nmax_terms = 0\nwithin = 0\nfolds = 2\nrepeats = 1\n"
             "seed = 0\npool = 1\nbudget = 0.5\n[rank]\nshortlist = 1\nnear_tie = 0\n");
  CHECK(plan.search.max_terms == 0u);
  CHECK(plan.search.folds == 2);
  CHECK(plan.search.seed == 0);
  CHECK(plan.search.pool == 1);
  CHECK(plan.search.budget_seconds == 0.5);
  CHECK(plan.rank.near_tie == 0.0);
  REQUIRE(plan.data.missing);
  CHECK(plan.data.missing->empty());
}

TEST_CASE("run: plan takes seeds beyond 2^63 as text", "[run][unit]") {
  CHECK(parsed(kData + "[search]\nseed = \"18446744073709551615\"\n").search.seed == 18446744073709551615u);
  CHECK(parsed(kData + "[search]\nseed = 9223372036854775807\n").search.seed == 9223372036854775807u);
  CHECK_THAT(refused(kData + "[search]\nseed = \"18446744073709551616\"\n").message, Catch::Contains("search.seed"));
}

TEST_CASE("run: plan in CR LF lines, with a byte order mark or dotted keys reads the same", "[run][unit]") {
  CHECK(parsed("[data]\r\nfile = \"a.csv\"\r\nresponse = \"y\"\r\n").data.file == "a.csv");
  CHECK(parsed("\xEF\xBB\xBF" + kData).data.response == "y");
  CHECK(parsed("data.file = \"a.csv\"\ndata.response = \"y\"\nsearch.folds = 4\n").search.folds == 4);
  CHECK(refused("data.file = \"a.csv\"\ndata.respose = \"y\"\n").where == "plan.toml:2:6");
}

TEST_CASE("run: plan may use a column that is not a predictor for folds and weights", "[run][unit]") {
  const Plan plan = parsed(kData + "ignore = [\"site\", \"hours\"]\ngroup = \"site\"\nweight = \"hours\"\n");
  CHECK(plan.data.group == "site");
}

TEST_CASE("run: plan file that cannot be read is an error of kind io that names it", "[run][unit]") {
  const auto plan = run::read_plan("/no/such/plan.toml");
  REQUIRE_FALSE(plan.ok());
  CHECK(plan.error().kind == ErrorKind::io);
  CHECK(plan.error().where == "/no/such/plan.toml");
  CHECK_FALSE(plan.error().hint.empty());
  CHECK(run::read_plan("/").error().kind == ErrorKind::io);
  CHECK(run::read_plan("/dev/zero").error().kind == ErrorKind::io);
}

TEST_CASE("run: plan's message shortens long values between characters", "[run][unit]") {
  std::string word = "a";
  for (int i = 0; i < 50; ++i) word += "é";
  const std::string message = refused(kData + "[rank]\nby = \"" + word + "\"\n").message;
  CHECK(message.size() < 120);
  CHECK_THAT(message, Catch::Contains("é…\""));
}

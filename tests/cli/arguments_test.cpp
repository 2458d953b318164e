#include "arguments.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using Names = std::vector<std::string>;

TEST_CASE("cli: lists are split at commas, a backslash keeps one", "[cli][unit]") {
  CHECK(split_list({"a,b", "c"}) == Names{"a", "b", "c"});
  CHECK(split_list({"price\\, net,b"}) == Names{"price, net", "b"});
  CHECK(split_list({""}) == Names{""});
  CHECK(split_list({}).empty());
}

TEST_CASE("cli: a name ending in .toml is a plan, everything else a table", "[cli][unit]") {
  CHECK(names_a_plan("coldstores.toml"));
  CHECK(names_a_plan("COLDSTORES.TOML"));
  CHECK_FALSE(names_a_plan("coldstores.csv"));
  CHECK_FALSE(names_a_plan("toml"));
  const Result<run::Plan> plan = plan_for("coldstores.csv");
  REQUIRE(plan.ok());
  CHECK(plan->data.file == "coldstores.csv");
  CHECK(plan->path.empty());
}

TEST_CASE("cli: options take the place of the plan's keys and of where they stood", "[cli][unit]") {
  run::Plan plan;
  plan.data.response = "old";
  plan.data.weight = "w";
  plan.search.folds = 5;
  plan.where["data.response"] = "plan.toml:2:1";
  plan.where["search.folds"] = "plan.toml:9:1";
  PlanArguments arguments;
  arguments.response = "new";
  arguments.ignore = {"a,b"};
  arguments.budget = "90m";
  arguments.by = "bic";
  arguments.max_terms = 4;
  apply(arguments, plan);
  CHECK(plan.data.response == "new");
  CHECK(plan.where.at("data.response") == "--response");
  CHECK(plan.data.ignore == Names{"a", "b"});
  CHECK(plan.search.budget_seconds == 5400.0);
  CHECK(plan.rank.by == "bic");
  CHECK(plan.search.max_terms == std::optional<std::size_t>(4));
  CHECK(plan.data.weight == std::optional<std::string>("w"));  // not given: left alone
  CHECK(plan.search.folds == 5);
  CHECK(plan.where.at("search.folds") == "plan.toml:9:1");
}

TEST_CASE("cli: --missing replaces the markers but an empty cell stays missing", "[cli][unit]") {
  run::Plan plan;
  TableArguments arguments;
  arguments.missing = {"-999,?"};
  apply(arguments, plan);
  REQUIRE(plan.data.missing.has_value());
  CHECK(*plan.data.missing == Names{"", "-999", "?"});
  CHECK(settings_in_force(plan) ==
        "separator found out from the file; decimal found out from the file; missing: an empty cell, -999, ?");
}

TEST_CASE("cli: settings in force name what was given and what is the default", "[cli][unit]") {
  run::Plan plan;
  plan.data.separator = "semicolon";
  plan.data.decimal = "comma";
  plan.data.text = {"site"};
  CHECK(settings_in_force(plan) ==
        "separator semicolon; decimal comma; missing: an empty cell, NA, N/A, null, ., -; text: site");
  plan.data.query = "select * from meters";
  CHECK(settings_in_force(plan) == "query: select * from meters");
}

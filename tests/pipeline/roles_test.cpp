// What goes wrong between a plan and a table: each has its own message, place and repair.
#include "support.hpp"

#include <catch2/catch.hpp>

namespace formsieve::test {

namespace {

const std::string kTable =
    "y,a,b,site,w,when\n"
    "10,1,5,north,1,1\n12,2,3,south,1,2\n15,3,4,north,2,3\n19,4,2,south,1,4\n22,5,6,north,1,5\n"
    "24,6,1,south,1,6\n29,7,5,north,1,7\n31,8,2,south,1,8\n36,9,3,north,1,9\n41,10,4,south,1,10\n";

Error failure(const run::Plan& plan, const TemporaryFolder& folder) {
  pipeline::SearchOptions options;
  options.out = folder.file("fails.run");
  const auto outcome = pipeline::search(plan, options);
  if (outcome) FAIL("the search succeeded");
  return outcome.error();
}

}  // namespace

TEST_CASE("pipeline: wrong column names are refused with the nearest one", "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string file = folder.write("t.csv", kTable);
  run::Plan plan = plan_for(file, "yy");
  Error error = failure(plan, folder);
  CHECK(error.kind == ErrorKind::plan);
  CHECK_THAT(error.message, Catch::Contains("'yy'") && Catch::Contains("data.response"));
  CHECK_THAT(error.hint, Catch::Contains("'y'"));

  plan = plan_for(file, "y");
  plan.data.ignore = {"sitee"};
  CHECK_THAT(failure(plan, folder).hint, Catch::Contains("'site'"));
  plan.data.ignore = {};
  plan.forms.always = {"aa"};
  CHECK_THAT(failure(plan, folder).message, Catch::Contains("forms.always"));
}

TEST_CASE("pipeline: a response that cannot be a response is refused", "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string file = folder.write("t.csv", kTable);
  Error error = failure(plan_for(file, "site"), folder);
  CHECK(error.kind == ErrorKind::data);
  CHECK_THAT(error.message, Catch::Contains("text"));
  const std::string constant = folder.write("c.csv", "y,a\n1,1\n1,2\n1,3\n1,4\n");
  error = failure(plan_for(constant, "y"), folder);
  CHECK_THAT(error.message, Catch::Contains("same on all"));
}

TEST_CASE("pipeline: weights that are not positive name their line", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::string text = kTable;
  text.replace(text.find("15,3,4,north,2,3"), 16, "15,3,4,north,0,3");
  run::Plan plan = plan_for(folder.write("t.csv", text), "y");
  plan.data.weight = "w";
  const Error error = failure(plan, folder);
  CHECK(error.kind == ErrorKind::data);
  CHECK_THAT(error.where, Catch::Contains("line 4"));
}

TEST_CASE("pipeline: fewer than three complete rows are refused with their number", "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string file = folder.write("gaps.csv", "y,a\n1,2\n2,3\n3,\n,5\n");
  const Error error = failure(plan_for(file, "y"), folder);
  CHECK(error.kind == ErrorKind::data);
  CHECK_THAT(error.message, Catch::Contains("only 2 of 4 rows are complete"));
}

TEST_CASE("pipeline: one column cannot have two roles", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(folder.write("t.csv", kTable), "y");
  plan.data.weight = "w";
  plan.forms.always = {"w"};
  CHECK_THAT(failure(plan, folder).message, Catch::Contains("not a predictor"));
}

TEST_CASE("pipeline: unknown checks and forms are refused with what exists", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(folder.write("t.csv", kTable), "y");
  plan.rank.require = {"equal-sprad"};
  CHECK_THAT(failure(plan, folder).hint, Catch::Contains("equal-spread"));
  plan.rank.require = {};
  plan.forms.of["a"] = {form_entry("sqroot")};
  const Error error = failure(plan, folder);
  CHECK(error.kind == ErrorKind::plan);
  CHECK_THAT(error.message, Catch::Contains("sqroot"));
}

TEST_CASE("pipeline: max_terms below the predictors that are always in is refused", "[pipeline][unit]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(folder.write("t.csv", kTable), "y");
  plan.forms.always = {"a", "b"};
  plan.search.max_terms = 1;
  CHECK_THAT(failure(plan, folder).hint, Catch::Contains("at least 2"));
}

TEST_CASE("pipeline: fewer rows than columns leaves the small candidates", "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string file = folder.write("few.csv", "y,a,b,c,d\n1,2,3,1,5\n2,1,4,3,2\n4,3,1,2,8\n3,5,2,7,1\n");
  const auto shortlist = search_json(plan_for(file, "y"), folder);
  CHECK(shortlist.at("shortlist").size() > 0);
  CHECK(shortlist.at("shortlist")[0].at("n") == 4);
}

TEST_CASE("pipeline: an identical column is set aside and a collinear one is counted as inseparable",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::string text = "y,a,twin,double\n";
  for (int i = 1; i <= 30; ++i)
    text += std::to_string(3 * i + (i * 7) % 5) + "," + std::to_string(i) + "," + std::to_string(i) + "," +
            std::to_string(2 * i + 1) + "\n";
  const auto shortlist = search_json(plan_for(folder.write("twins.csv", text), "y"), folder);
  CHECK(shortlist.at("menus").size() == 2);
  CHECK(shortlist.at("space").at("inseparable") != "0");
  const std::string remarks = shortlist.at("remarks").dump();
  CHECK_THAT(remarks, Catch::Contains("'a' and 'double' cannot be told apart on all rows or in some fold"));
}

}  // namespace formsieve::test

// Leaving out a row: against a search of the table without that row.
#include "support.hpp"

#include "pipeline/examine.hpp"
#include "pipeline/leave_out.hpp"
#include "pipeline/prepare.hpp"

#include <catch2/catch.hpp>

#include <sstream>

using namespace formsieve;
using namespace formsieve::test;
using nlohmann::json;

namespace {

const std::string kTrees = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open/trees.csv";

}  // namespace

TEST_CASE("pipeline: a candidate without a row scores as one fitted to the table without it", "[pipeline][property]") {
  const TemporaryFolder folder;
  std::string shorter;
  std::istringstream lines(read_text(kTrees));
  constexpr std::size_t kRow = 17;
  std::string line;
  for (std::size_t i = 0; std::getline(lines, line); ++i)
    if (i != kRow + 1) shorter += line + "\n";
  run::Plan plan = plan_for(kTrees, "volume");
  plan.forms.response = {form_entry("ln")};
  auto table = pipeline::load_table(plan, 1);
  REQUIRE(table);
  const auto whole = pipeline::prepare(std::move(*table), plan);
  REQUIRE(whole);
  plan.data.file = folder.write("shorter.csv", shorter);
  auto rest = pipeline::load_table(plan, 1);
  REQUIRE(rest);
  auto expected = pipeline::prepare(std::move(*rest), plan);
  REQUIRE(expected);
  const pipeline::Prepared without = pipeline::without_row(*whole, kRow);
  REQUIRE(without.data.n_rows + 1 == whole->data.n_rows);
  expected->folds = without.folds;  // dealt anew they would differ
  expected->data.predictors = without.data.predictors;
  for (std::size_t i = 0; i < without.data.n_rows; ++i) CHECK(without.data.response[i] == expected->data.response[i]);
  const pipeline::Examiner one(without), two(*expected);
  for (const std::uint16_t form : {std::uint16_t{1}, std::uint16_t{2}}) {
    const search::Choice choice{0, {form, 1}};
    const auto a = one.score(choice, 0), b = two.score(choice, 0);
    REQUIRE(a.candidate);
    REQUIRE(b.candidate);
    CHECK(a.candidate->n == 30);
    CHECK(a.candidate->rss == b.candidate->rss);
    CHECK(a.candidate->likelihood.aic == b.candidate->likelihood.aic);
    REQUIRE(a.candidate->cv.rmse);
    CHECK(*a.candidate->cv.rmse == *b.candidate->cv.rmse);
  }
}

TEST_CASE("pipeline: leaving out the row held to be a typing error says who leads", "[pipeline][reference]") {
  // Atkinson 1986: row 18 of the hill races is held to be a typing error
  const TemporaryFolder folder;
  run::Plan plan = plan_for(std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open/hills.csv", "time");
  plan.forms.response = {form_entry("identity")};
  const json first = search_json(plan, folder).at("shortlist").at(0);
  bool found = false;
  for (const auto& row : first.at("influence").at("rows")) {
    CHECK(row.at("leader_without").is_number());
    found = found || row.at("row") == 17;
  }
  CHECK(found);
}

// compare: candidates of a real run against NumPy, SciPy and statsmodels; a table that changed or is gone.
#include "support.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>

#include <cmath>
#include <filesystem>
#include <map>

namespace formsieve::test {

namespace {

using nlohmann::json;

const std::string kTrees = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open/trees.csv";
const std::string kPairs = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/comparison/pairs.json";

/// Eighteen candidates of the cherry trees, all of them listed.
std::string trees_run(const TemporaryFolder& folder) {
  const std::string table = folder.write("trees.csv", read_text(kTrees));
  run::Plan plan = plan_for(table, "volume");
  plan.forms.response = std::vector<run::FormEntry>{form_entry("identity"), form_entry("ln")};
  plan.forms.default_menu = plan.forms.response;
  plan.rank.families = false;
  plan.rank.shortlist = 100;
  (void)search_json(plan, folder);
  return folder.file("out.run");
}

std::size_t rank_of(const judge::Shortlist& shortlist, const json& model) {
  const std::map<std::string, std::string> terms = model.at("terms");
  for (const judge::Candidate& candidate : shortlist.candidates) {
    const bool logarithm = candidate.response.kind == forms::Kind::ln;
    if (logarithm != (model.at("response") == "ln") || candidate.terms.size() != terms.size()) continue;
    bool same = true;
    for (const judge::Term& term : candidate.terms) {
      const auto wanted = terms.find(term.column);
      same = same && wanted != terms.end() && (term.form.kind == forms::Kind::ln) == (wanted->second == "ln");
    }
    if (same) return candidate.rank;
  }
  FAIL("no candidate like " << model.dump());
  return 0;
}

judge::Shortlist opened(const std::string& run) {
  auto shortlist = pipeline::open_run(run);
  if (!shortlist) FAIL(shortlist.error().message);
  return *std::move(shortlist);
}

judge::Comparison compared(const std::string& run, const std::vector<std::size_t>& ranks, unsigned threads = 0) {
  auto comparison = pipeline::compare(run, ranks, threads);
  if (!comparison) FAIL(comparison.error().message);
  return *std::move(comparison);
}

void check_value(const std::optional<double>& found, const json& expected) {
  REQUIRE(found.has_value());
  CHECK(*found == Approx(expected.get<double>()).epsilon(1e-8));
}

void check_pair(const judge::PairComparison& pair, const json& expected) {
  REQUIRE(pair.likelihood);
  CHECK(pair.likelihood->log_likelihood == Approx(expected.at("log_likelihood").get<double>()).epsilon(1e-9));
  REQUIRE(pair.disagreement);
  CHECK(pair.disagreement->root_mean_square_own == Approx(expected.at("root_mean_square").get<double>()).epsilon(1e-9));
  CHECK(pair.disagreement->row == expected.at("row").get<std::size_t>());
  CHECK(pair.disagreement->line == pair.disagreement->row + 2);  // the header is line 1
  if (expected.contains("vuong")) {
    const json& vuong = expected.at("vuong");
    CHECK(pair.likelihood->nesting == judge::Nesting::none);
    check_value(pair.likelihood->z, vuong.at("z"));
    check_value(pair.likelihood->z_aic, vuong.at("z_aic"));
    check_value(pair.likelihood->z_bic, vuong.at("z_bic"));
    check_value(pair.likelihood->p_bic, vuong.at("p_bic"));
  } else {
    CHECK(pair.likelihood->nesting == judge::Nesting::second_in_first);
    check_value(pair.likelihood->f, expected.at("nested").at("f"));
    check_value(pair.likelihood->p_f, expected.at("nested").at("p"));
    CHECK(*pair.likelihood->df == expected.at("nested").at("df").get<double>());
    CHECK(*pair.likelihood->df2 == expected.at("nested").at("df2").get<double>());
  }
  REQUIRE(pair.linear_log.has_value() == expected.contains("linear_log"));
  if (!pair.linear_log) return;
  check_value(pair.linear_log->t_linear, expected.at("linear_log").at("against_linear").at("t"));
  check_value(pair.linear_log->p_linear, expected.at("linear_log").at("against_linear").at("p"));
  check_value(pair.linear_log->t_log, expected.at("linear_log").at("against_log_linear").at("t"));
  check_value(pair.linear_log->p_log, expected.at("linear_log").at("against_log_linear").at("p"));
  CHECK(*pair.linear_log->df_log == expected.at("linear_log").at("against_log_linear").at("df").get<double>());
}

}  // namespace

TEST_CASE("pipeline: compare agrees with statsmodels on the cherry trees", "[pipeline][reference]") {
  const TemporaryFolder folder;
  const std::string run = trees_run(folder);
  const judge::Shortlist shortlist = opened(run);
  const json expected = json::parse(read_text(kPairs)).at("pairs");
  for (const json& pair : expected) {
    CAPTURE(pair.dump());
    const judge::Comparison found =
        compared(run, {rank_of(shortlist, pair.at("first")), rank_of(shortlist, pair.at("second"))});
    REQUIRE(found.missing.empty());
    REQUIRE(found.pairs.size() == 1);
    check_pair(found.pairs[0], pair);
    CHECK(found.pairs[0].likelihood->log_likelihood ==
          Approx(found.candidates[1].likelihood.log_likelihood - found.candidates[0].likelihood.log_likelihood));
  }
}

TEST_CASE("pipeline: compare turns every sign when the candidates are exchanged, and names the values of what differs",
          "[pipeline][property]") {
  const TemporaryFolder folder;
  const std::string run = trees_run(folder);
  for (std::size_t rank = 2; rank < 12; ++rank) {
    const judge::PairComparison there = compared(run, {1, rank}).pairs[0], back = compared(run, {rank, 1}).pairs[0];
    CHECK(*there.folds.t == Approx(-*back.folds.t));
    CHECK(there.likelihood->log_likelihood == Approx(-back.likelihood->log_likelihood));
    CHECK(there.disagreement->row == back.disagreement->row);
    CHECK(there.disagreement->first_own == back.disagreement->second_own);
    if (there.linear_log) CHECK(there.linear_log->t_log == back.linear_log->t_log);
    for (const auto& [column, value] : there.disagreement->values) {
      CHECK((column == "girth" || column == "height"));
      CHECK_FALSE(value.empty());
    }
  }
}

TEST_CASE("pipeline: five candidates make ten pairs, the same for any number of threads", "[pipeline][parallel]") {
  const TemporaryFolder folder;
  const std::string run = trees_run(folder);
  const judge::Comparison found = compared(run, {1, 2, 3, 4, 5}, 1);
  CHECK(found.pairs.size() == 10);
  const std::string one = report::comparison_json(found);
  CHECK(report::comparison_json(compared(run, {1, 2, 3, 4, 5}, 4)) == one);
  const json read = json::parse(one);
  CHECK(read.at("pairs").size() == 10);
  CHECK(read.at("pairs")[9].at("first") == 4);
  CHECK(read.at("pairs")[9].at("second") == 5);
}

TEST_CASE("pipeline: without its table a run is compared by what its folder holds, and the reason is said",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string run = trees_run(folder);
  folder.write("trees.csv", read_text(kTrees) + "12.1,74,21.5\n");
  const judge::Comparison changed = compared(run, {1, 2});
  REQUIRE(changed.missing.size() == 1);
  CHECK_THAT(changed.missing[0], Catch::Contains("is not the one that was searched") && Catch::Contains("SHA-256"));
  CHECK(changed.pairs[0].folds.t);
  CHECK_FALSE(changed.pairs[0].likelihood);
  CHECK_FALSE(changed.pairs[0].disagreement);
  std::filesystem::remove(folder.file("trees.csv"));
  const judge::Comparison gone = compared(run, {1, 2});
  REQUIRE(gone.missing.size() == 1);
  CHECK_THAT(gone.missing[0], Catch::Contains("trees.csv"));
  CHECK(json::parse(report::comparison_json(gone)).at("pairs")[0].at("likelihood").is_null());
}

TEST_CASE("pipeline: compare refuses ranks that are not listed, twice the same, too few and too many",
          "[pipeline][unit]") {
  const TemporaryFolder folder;
  const std::string run = trees_run(folder);
  for (const std::vector<std::size_t>& ranks :
       {std::vector<std::size_t>{1}, {1, 2, 3, 4, 5, 6}, {1, 1}, {1, 99}, {0, 1}}) {
    const auto comparison = pipeline::compare(run, ranks);
    REQUIRE_FALSE(comparison.ok());
    CHECK(comparison.error().kind == ErrorKind::usage);
  }
  CHECK_FALSE(pipeline::compare(folder.file("none.run"), {1, 2}).ok());
}

}  // namespace formsieve::test

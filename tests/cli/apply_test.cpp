// formsieve apply, run as a user runs it.
#include "lines.hpp"
#include "process.hpp"
#include "tables.hpp"

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

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

Outcome apply(const std::string& table, std::vector<std::string> more = {}, const std::string& rank = "recommended") {
  more.insert(more.begin(), {"apply", stores().file("stores.run"), rank, table});
  return run_formsieve(more);
}

constexpr const char* kNew = "id,fill_percent,floor_area\n\"a,1\",80,500\nb,80,\nc,90,1e6\n";

}  // namespace

TEST_CASE("cli: apply writes a row of scores for each row, the kept columns first", "[cli][unit]") {
  stores().write("new.csv", kNew);
  const Outcome outcome = apply(stores().file("new.csv"), {"--keep", "id"});
  CHECK(outcome.exit_code == 0);
  const auto lines = lines_of(outcome.out);
  REQUIRE(lines.size() == 4);
  CHECK(lines[0] == "id,mean,median,low_normal,high_normal,low_cv,high_cv,flags");
  CHECK(lines[1].starts_with("\"a,1\","));
  CHECK(lines[1].ends_with(","));
  CHECK(lines[2] == "b,,,,,,,missing floor_area");
  CHECK(has(lines[3], "outside floor_area"));
  CHECK(has(outcome.err, "3 rows, 2 scored, 2 flagged: missing 1, outside 1"));
}

TEST_CASE("cli: apply writes files and JSON lines", "[cli][unit]") {
  stores().write("new.csv", kNew);
  const std::string table = stores().file("new.csv");
  const Outcome plain = apply(table);
  const std::string out = stores().file("scores.csv");
  CHECK(apply(table, {"--out", out, "--replace"}).exit_code == 0);
  CHECK(stores().read("scores.csv") == plain.out);
  const Outcome again = apply(table, {"--out", out});
  CHECK(again.exit_code == 2);
  CHECK(has(again.err, "--replace"));
  const Outcome json = apply(table, {"--json", "--keep", "id"});
  const auto lines = lines_of(json.out);
  REQUIRE(lines.size() == 3);
  CHECK(nlohmann::json::parse(lines[0]).at("id") == "a,1");
  CHECK(nlohmann::json::parse(lines[0]).at("flags").empty());
  CHECK(nlohmann::json::parse(lines[1]).at("mean").is_null());
  CHECK(nlohmann::json::parse(lines[1]).at("flags").at(0) == "missing floor_area");
  CHECK(nlohmann::json::parse(lines[2]).at("mean").get<double>() > 0.0);
}

TEST_CASE("cli: a wider level gives wider intervals", "[cli][unit]") {
  stores().write("one.csv", "fill_percent,floor_area\n80,500\n");
  const auto width = [&](const std::string& level) {
    const Outcome outcome = apply(stores().file("one.csv"), {"--level", level, "--json"});
    REQUIRE(outcome.exit_code == 0);
    const auto row = nlohmann::json::parse(outcome.out);
    return row.at("high_cv").get<double>() - row.at("low_cv").get<double>();
  };
  CHECK(width("0.5") < width("0.8"));
  CHECK(width("0.8") < width("0.95"));
}

TEST_CASE("cli: apply says what is wrong, where, and what to type", "[cli][unit]") {
  const auto refused = [](const Outcome& outcome, int code, const std::string& what, const std::string& fix) {
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == code);
    CHECK(outcome.err.starts_with("error: "));
    CHECK(has(outcome.err, what));
    CHECK(has(outcome.err, "\nfix: "));
    CHECK(has(outcome.err, fix));
  };
  const Folder folder;
  folder.write("renamed.csv", "fill_percent,flor_area\n80,500\n");
  folder.write("stray.csv", "fill_percent,floor_area\n80,500\n81,many\n");
  folder.write("good.csv", "fill_percent,floor_area\n80,500\n");
  refused(apply(folder.file("renamed.csv")), 3, "no column 'floor_area'", "flor_area");
  const Outcome stray = apply(folder.file("stray.csv"));
  refused(stray, 3, "'many' is not a number", "missing");
  CHECK(has(stray.err, "stray.csv, line 3, column 'floor_area'"));
  CHECK(has(stray.err, "settings: "));
  CHECK(apply(folder.file("stray.csv"), {"--missing", "many"}).exit_code == 0);
  refused(apply(folder.file("none.csv")), 3, "none.csv", "spelling");
  refused(apply(folder.file("good.csv"), {}, "99"), 2, "rank '99'", "recommended");
  refused(apply(folder.file("good.csv"), {"--keep", "fill"}), 2, "--keep names 'fill'", "fill_percent");
  refused(apply(folder.file("good.csv"), {"--level", "95"}), 2, "'95'", "--level 0.9");
  refused(run_formsieve({"apply", folder.file("no.run"), "1", folder.file("good.csv")}), 2, "no.run", "");
  refused(run_formsieve({"apply", stores().file("stores.run")}), 2, "needs RANK", "apply RUN RANK DATA");
}

// The commands of the program on small tables: exit codes, standard output, standard error.
#include "lines.hpp"
#include "process.hpp"
#include "tables.hpp"

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <csignal>
#include <filesystem>

using namespace formsieve::cli::testing;
using nlohmann::json;

namespace {

const Folder& stores() {
  static const Folder folder;
  static const bool written = (folder.write("stores.csv", stores_csv()), true);
  (void)written;
  return folder;
}

// One search that several tests look at.
const Outcome& searched() {
  static const Outcome outcome = run_formsieve(
      {"search", stores().file("stores.csv"), "--response", "energy_kwh", "--out", stores().file("stores.run")});
  return outcome;
}

void check_error(const Outcome& outcome, int code, const std::string& what, const std::string& fix) {
  CHECK(outcome.exit_code == code);
  CHECK(outcome.out.empty());
  CHECK(outcome.err.starts_with("error: "));
  CHECK(has(outcome.err, what));
  CHECK(has(outcome.err, "\nfix: "));
  CHECK(has(outcome.err, fix));
}

}  // namespace

TEST_CASE("cli: survey prints its table on standard output alone", "[cli][unit]") {
  const Outcome outcome = run_formsieve({"survey", stores().file("stores.csv")});
  CHECK(outcome.exit_code == 0);
  CHECK(outcome.err.empty());
  CHECK(widest_line(outcome.out) <= 80);
  CHECK(has(outcome.out, "120 rows; 4 columns of numbers, 1 of text"));
  for (const char* column : {"energy_kwh", "floor_area", "fill_percent", "door_openings", "region"}) {
    CHECK(has(outcome.out, column));
  }
}

TEST_CASE("cli: survey is restricted to the columns asked for", "[cli][unit]") {
  const std::string data = stores().file("stores.csv");
  const Outcome outcome = run_formsieve({"survey", data, "--column", "floor_area,fill_percent"});
  CHECK(outcome.exit_code == 0);
  CHECK(has(outcome.out, "fill_percent"));
  CHECK_FALSE(has(outcome.out, "door_openings"));
  check_error(run_formsieve({"survey", data, "--column", "flor_area"}), 2, "names 'flor_area'",
              "did you mean --column floor_area?");
}

TEST_CASE("cli: survey as JSON parses and holds every column", "[cli][unit]") {
  const Outcome outcome = run_formsieve({"survey", stores().file("stores.csv"), "--json"});
  CHECK(outcome.exit_code == 0);
  const json parsed = json::parse(outcome.out);
  CHECK(parsed.at("columns").size() == 5);
}

TEST_CASE("cli: survey takes a plan and what is said beside it", "[cli][unit]") {
  const Folder folder;
  folder.write("semi.csv", "a;b;c\n1,5;2;x\n2,5;3;y\n4,0;5;x\n");
  folder.write("plan.toml", "[data]\nfile = \"semi.csv\"\nresponse = \"b\"\nseparator = \"comma\"\n");
  const Outcome wrong = run_formsieve({"survey", folder.file("plan.toml")});
  CHECK(wrong.exit_code != 0);
  const Outcome outcome =
      run_formsieve({"survey", folder.file("plan.toml"), "--separator", "semicolon", "--decimal", "comma"});
  CHECK(outcome.exit_code == 0);
  CHECK(has(outcome.out, "2 columns of numbers, 1 of text"));
}

TEST_CASE("cli: a narrow screen gets paragraphs", "[cli][unit]") {
  Setting narrow;
  narrow.environment = {"COLUMNS=40"};
  const Outcome survey = run_formsieve({"survey", stores().file("stores.csv")}, narrow);
  CHECK(survey.exit_code == 0);
  CHECK(widest_line(survey.out) <= 40);
  REQUIRE(searched().exit_code == 0);
  for (const std::vector<std::string>& arguments :
       {std::vector<std::string>{"show", stores().file("stores.run")}, {"show", stores().file("stores.run"), "1"}}) {
    const Outcome shown = run_formsieve(arguments, narrow);
    CHECK(shown.exit_code == 0);
    for (const std::string& line : lines_of(shown.out)) {
      const bool is_command = has(line, "formsieve show ");  // to be copied, hence never broken
      if (!is_command) CHECK(formsieve::cli::display_width(line) <= 40);
    }
  }
}

// The first ranks that are listed; others may be shown by one of them.
std::vector<std::string> listed_ranks(std::size_t n) {
  const json shown = json::parse(run_formsieve({"show", stores().file("stores.run"), "--json"}).out);
  std::vector<std::string> ranks;
  for (std::size_t i = 0; i < n; ++i) ranks.push_back(std::to_string(shown.at("shortlist")[i].at("rank").get<int>()));
  return ranks;
}

TEST_CASE("cli: compare sets ranks and named lines side by side, on any screen", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string run = stores().file("stores.run");
  const std::vector<std::string> ranks = listed_ranks(3);
  for (const char* columns : {"44", "80", "120"}) {
    Setting screen;
    screen.environment = {std::string("COLUMNS=") + columns};
    const Outcome outcome = run_formsieve({"compare", run, ranks[0], ranks[1], ranks[2]}, screen);
    CHECK(outcome.exit_code == 0);
    CHECK(outcome.err.empty());
    CHECK(has(outcome.out, "Is one more accurate than fold noise?"));
    CHECK(has(outcome.out, "Where do their predictions part?"));
    for (const std::string& line : lines_of(outcome.out))
      if (!has(line, "formsieve show ")) CHECK(formsieve::cli::display_width(line) <= std::stoul(columns));
  }
  const json parsed = json::parse(run_formsieve({"compare", run, "best", ranks[1], "--json"}).out);
  CHECK(parsed.at("candidates").size() == 2);
  CHECK(parsed.at("pairs")[0].at("likelihood").at("words").is_string());
}

TEST_CASE("cli: compare refuses what it cannot set side by side", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string run = stores().file("stores.run");
  check_error(run_formsieve({"compare", run, "1", "1"}), 2, "'1' is rank 1, which is named twice", "different");
  check_error(run_formsieve({"compare", run, "1"}), 2, "two to five candidates can be compared, not 1", "two to five");
  check_error(run_formsieve({"compare", run, "1", "best1"}), 2, "no rank 'best1'", "recommended");
  check_error(run_formsieve({"compare", run}), 2, "needs RANK", "write formsieve compare RUN RANK RANK");
  check_error(run_formsieve({"compare", "none.run", "1", "2"}), 2, "none.run", "");
}

TEST_CASE("cli: a table that is not there is bad data, a plan that is not there bad usage", "[cli][unit]") {
  check_error(run_formsieve({"survey", "none.csv"}), 3, "none.csv", "");
  check_error(run_formsieve({"search", "none.toml"}), 2, "none.toml", "");
  check_error(run_formsieve({"show", "none.run"}), 2, "none.run", "");
}

TEST_CASE("cli: a broken table names file, line and cell, and the settings it was read by", "[cli][unit]") {
  const Folder folder;
  folder.write("broken.csv", "a,b\n1,2\n3,n.a.\n5,6\n");
  const Outcome outcome = run_formsieve({"survey", folder.file("broken.csv"), "--decimal", "point"});
  check_error(outcome, 3, "n.a.", "missing");
  CHECK(has(outcome.err, "broken.csv"));
  CHECK(has(outcome.err, "line 3"));
  CHECK(has(outcome.err, "\nsettings: separator found out from the file; decimal point; missing: an empty cell"));
  CHECK(run_formsieve({"survey", folder.file("broken.csv"), "--missing", "n.a."}).exit_code == 0);
  CHECK(run_formsieve({"survey", folder.file("broken.csv"), "--text", "b"}).exit_code == 0);
}

TEST_CASE("cli: a response that is text or unknown is refused with what is near", "[cli][unit]") {
  const std::string data = stores().file("stores.csv");
  const Folder folder;
  const auto search = [&](const std::string& response) {
    return run_formsieve({"search", data, "--response", response, "--out", folder.file("a.run")});
  };
  const Outcome text = search("region");
  CHECK((text.exit_code == 2 || text.exit_code == 3));
  CHECK(has(text.err, "region"));
  check_error(search("energy_kw"), 2, "energy_kw", "energy_kwh");
  CHECK(has(search("energy_kw").err, "--response"));
}

TEST_CASE("cli: draft writes a plan that search runs as it is", "[cli][unit]") {
  const Folder folder;
  std::filesystem::create_directory(folder.file("plans"));
  folder.write("stores.csv", stores_csv());
  Setting here;
  here.folder = folder.path();
  const Outcome draft =
      run_formsieve({"draft", "stores.csv", "--response", "energy_kwh", "--out", "plans/stores.toml"}, here);
  CHECK(draft.exit_code == 0);
  CHECK(draft.out.empty());
  CHECK(has(draft.err, "formsieve search plans/stores.toml"));
  CHECK(run_formsieve({"search", "plans/stores.toml", "--out", "a.run"}, here).exit_code == 0);
  check_error(run_formsieve({"draft", "stores.csv", "--response", "energy_kwh", "--out", "plans/stores.toml"}, here), 2,
              "exists already", "--replace");
  const Outcome printed = run_formsieve({"draft", "stores.csv", "--response", "energy_kwh"}, here);
  CHECK(printed.exit_code == 0);
  CHECK(has(printed.out, "response = \"energy_kwh\""));
  const Outcome as_json = run_formsieve({"draft", "stores.csv", "--response", "energy_kwh", "--json"}, here);
  CHECK(json::parse(as_json.out).at("plan").get<std::string>() == printed.out);
}

TEST_CASE("cli: search announces on standard error and prints the shortlist on standard output", "[cli][unit]") {
  const Outcome& outcome = searched();
  CHECK(outcome.exit_code == 0);
  CHECK(has(outcome.err, " candidates: "));
  // how long depends on the machine: "about 0.2 s", or "less than 0.1 s" without an "about"
  const std::string announced = unwrapped(outcome.err);
  CHECK((has(announced, "120 rows; 10 folds; about ") || has(announced, "120 rows; 10 folds; less than 0.1 s")));
  CHECK_FALSE(has(outcome.err, "\x1b"));
  CHECK(widest_line(outcome.out) <= 80 + stores().path().size());  // the run folder is never broken
  CHECK(has(outcome.out, "rank  response  CV RMSE ± se"));
  CHECK(has(outcome.out, "The recommended equation"));
  CHECK(has(outcome.out, "\nWhat each form costs, for "));
  CHECK(has(outcome.out, "\nError by number of terms, for "));
  CHECK(has(outcome.out, "formsieve show " + stores().file("stores.run")));
}

TEST_CASE("cli: show prints what search printed", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const Outcome shown = run_formsieve({"show", stores().file("stores.run")});
  CHECK(shown.exit_code == 0);
  CHECK(shown.err.empty());
  CHECK(shown.out == searched().out);
}

TEST_CASE("cli: show --all is the shortlist, the profile and every listed candidate", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string run = stores().file("stores.run");
  const Outcome shown = run_formsieve({"show", run, "--all"});
  REQUIRE(shown.exit_code == 0);
  CHECK(shown.err.empty());
  std::size_t at = 0;
  const auto follows = [&](const std::string& part) {
    const std::size_t found = shown.out.find(part, at);
    if (found != std::string::npos) at = found + 1;
    return found != std::string::npos;
  };
  CHECK(follows("Ranked by CV RMSE"));
  CHECK(follows("What each form costs"));
  const json listed = json::parse(run_formsieve({"show", run, "--json"}).out).at("shortlist");
  for (const auto& candidate : listed) {
    CAPTURE(candidate.at("rank"));
    CHECK(follows("\nRank " + std::to_string(candidate.at("rank").get<int>())));
  }
}

TEST_CASE("cli: show RANK prints one candidate in full, by rank or by name", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string run = stores().file("stores.run");
  const Outcome one = run_formsieve({"show", run, "1"});
  CHECK(one.exit_code == 0);
  CHECK(one.out.starts_with("Rank 1"));
  for (const char* part : {"The equation", "How well does it predict", "robust se", "Where may it be used?"}) {
    CHECK(has(one.out, part));
  }
  CHECK(run_formsieve({"show", run, "recommended"}).exit_code == 0);
  check_error(run_formsieve({"show", run, "9999"}), 2, "no rank '9999'", "one of the ranks 1 to");
}

TEST_CASE("cli: search and show as JSON give the run's shortlist", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string run = stores().file("stores.run");
  const json written = json::parse(stores().read("stores.run/shortlist.json"));
  const json shown = json::parse(run_formsieve({"show", run, "--json"}).out);
  CHECK(shown == written);
  const json one = json::parse(run_formsieve({"show", run, "2", "--json"}).out);
  REQUIRE(one.at("shortlist").size() == 1);
  CHECK(one.at("shortlist")[0].at("rank") == 2);
  const Folder folder;
  const Outcome again = run_formsieve({"search", stores().file("stores.csv"), "--response", "energy_kwh", "--out",
                                       folder.file("b.run"), "--json", "--threads", "1"});
  CHECK(json::parse(again.out).at("shortlist") == written.at("shortlist"));
}

TEST_CASE("cli: options given beside a plan take the place of its keys", "[cli][unit]") {
  const Folder folder;
  folder.write("stores.csv", stores_csv());
  folder.write("plan.toml", "[data]\nfile = \"stores.csv\"\nresponse = \"floor_area\"\n[search]\nfolds = 5\n");
  const Outcome outcome = run_formsieve({"search", folder.file("plan.toml"), "--response", "energy_kwh", "--folds", "4",
                                         "--ignore", "region,door_openings", "--shortlist", "3", "--by", "bic", "--out",
                                         folder.file("a.run"), "--json"});
  REQUIRE(outcome.exit_code == 0);
  const json result = json::parse(outcome.out);
  CHECK(result.at("data").at("response") == "energy_kwh");
  CHECK(result.at("folds").at("count") == 4);
  CHECK_FALSE(has(outcome.out, "\"door_openings\""));
}

TEST_CASE("cli: an existing run folder is kept unless it may be replaced", "[cli][unit]") {
  REQUIRE(searched().exit_code == 0);
  const std::string before = stores().read("stores.run/shortlist.json");
  const std::vector<std::string> arguments = {
      "search", stores().file("stores.csv"), "--response", "energy_kwh", "--ignore", "region",
      "--out",  stores().file("stores.run")};
  const Outcome refused = run_formsieve(arguments);
  CHECK(refused.exit_code == 2);
  CHECK(has(refused.err, "--replace"));
  CHECK(stores().read("stores.run/shortlist.json") == before);
}

TEST_CASE("cli: a reader that goes away ends the program quietly", "[cli][unit]") {
  Setting reader;
  reader.out = Setting::Stream::read_once;
  for (const std::vector<std::string>& arguments :
       {std::vector<std::string>{"survey", stores().file("stores.csv")}, {"--help"}, {"search", "--help"}}) {
    const Outcome outcome = run_formsieve(arguments, reader);
    CHECK(outcome.exit_code == 0);
    CHECK(outcome.err.empty());
  }
}

TEST_CASE("cli: a full or closed standard output is reported", "[cli][unit]") {
  for (const Setting::Stream stream : {Setting::Stream::full, Setting::Stream::closed}) {
    Setting device;
    device.out = stream;
    for (const std::vector<std::string>& arguments :
         {std::vector<std::string>{"survey", stores().file("stores.csv")}, {"--version"}, {"--help"}}) {
      const Outcome outcome = run_formsieve(arguments, device);
      CHECK(outcome.exit_code == 1);
      CHECK(has(outcome.err, "error: the result could not be written to standard output"));
    }
  }
}

TEST_CASE("cli: a terminal gets colour unless NO_COLOR is set, a pipe never", "[cli][unit]") {
  const std::vector<std::string> arguments = {"survey", stores().file("stores.csv")};
  Setting terminal;
  terminal.out = Setting::Stream::terminal;
  terminal.environment = {"TERM=xterm", "COLUMNS=80"};
  CHECK(has(run_formsieve(arguments, terminal).out, "\x1b[1m"));
  terminal.environment.push_back("NO_COLOR=1");
  CHECK_FALSE(has(run_formsieve(arguments, terminal).out, "\x1b"));
  CHECK_FALSE(has(run_formsieve(arguments).out, "\x1b"));
}

TEST_CASE("cli: a signal stops a search early with a usable run folder and exit code 4", "[cli][unit]") {
  const Folder folder;
  folder.write("endless.csv", endless_csv());
  Setting interrupted;
  interrupted.signals = {SIGINT};
  interrupted.signal_when = "candidates: ";
  interrupted.signal_after = std::chrono::milliseconds(1500);
  interrupted.err_is_terminal = true;
  interrupted.environment = {"TERM=xterm", "COLUMNS=80"};
  const Outcome outcome = run_formsieve(
      {"search", folder.file("endless.csv"), "--response", "y", "--budget", "3000d", "--out", folder.file("a.run")},
      interrupted);
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.out, "scored before the search was stopped"));
  CHECK(has(outcome.err, "Press Ctrl-C again"));
  CHECK(has(outcome.err, "Stopped early: "));
  CHECK(has(outcome.err, "\x1b[2Kscreening"));  // the progress line, after a second
  const std::size_t last_line = outcome.err.rfind("\x1b[2K");
  CHECK_FALSE(has(outcome.err.substr(last_line), "screening"));  // and nothing of it left
  CHECK(run_formsieve({"show", folder.file("a.run"), "1"}).exit_code == 0);
}

TEST_CASE("cli: a second signal ends the program at once", "[cli][unit]") {
  const Folder folder;
  folder.write("endless.csv", endless_csv());
  Setting impatient;
  impatient.signals = {SIGINT, SIGTERM};
  impatient.signal_when = "candidates: ";
  impatient.signal_after = std::chrono::milliseconds(100);
  const Outcome outcome = run_formsieve(
      {"search", folder.file("endless.csv"), "--response", "y", "--budget", "3000d", "--out", folder.file("a.run")},
      impatient);
  CHECK(outcome.exit_code == 130);
  CHECK(outcome.out.empty());
}

TEST_CASE("cli: a space too large for the budget is refused before it starts when every candidate is asked for",
          "[cli][unit]") {
  const Folder folder;
  folder.write("endless.csv", endless_csv());
  check_error(run_formsieve({"search", folder.file("endless.csv"), "--response", "y", "--budget", "1s", "--strategy",
                             "every", "--out", folder.file("a.run")}),
              2, "", "max_terms");
}

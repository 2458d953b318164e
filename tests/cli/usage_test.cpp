// The program's help and its answers to wrong arguments.
#include "lines.hpp"
#include "process.hpp"

#include <formsieve/base.hpp>

#include <catch2/catch.hpp>

using namespace formsieve::cli::testing;

TEST_CASE("cli: the version is printed on standard output, with the instruction set", "[cli][unit]") {
  const Outcome outcome = run_formsieve({"--version"});
  CHECK(outcome.exit_code == 0);
  CHECK(outcome.out == std::string("formsieve ") + formsieve::version() +
                           "\ninstruction set: " + formsieve::base::instruction_set() + "\n");
  CHECK(outcome.err.empty());
}

TEST_CASE("cli: a variable forces an instruction set, and a wrong one is refused", "[cli][unit]") {
  Setting setting;
  setting.environment = {"FORMSIEVE_INSTRUCTIONS=baseline"};
  CHECK(has(run_formsieve({"--version"}, setting).out, "instruction set: baseline\n"));
  setting.environment = {"FORMSIEVE_INSTRUCTIONS=fast"};
  const Outcome outcome = run_formsieve({"--version"}, setting);
  CHECK(outcome.exit_code == 2);
  CHECK(outcome.out.empty());
  CHECK(has(outcome.err, "'fast'"));
  CHECK(has(outcome.err, "FORMSIEVE_INSTRUCTIONS"));
}

TEST_CASE("cli: every help page fits a screen of 24 lines and 80 columns and shows an example", "[cli][unit]") {
  for (const char* command : {"", "survey", "draft", "search", "show", "compare", "apply", "equation"}) {
    CAPTURE(command);
    const std::string name(command);
    const Outcome outcome =
        run_formsieve(name.empty() ? std::vector<std::string>{"--help"} : std::vector<std::string>{name, "--help"});
    CHECK(outcome.exit_code == 0);
    CHECK(outcome.err.empty());
    CHECK(lines_of(outcome.out).size() <= 24);
    CHECK(widest_line(outcome.out) <= 80);
    CHECK(has(outcome.out, "formsieve " + (name.empty() ? "search " : name + " ") + "coldstores"));
  }
}

TEST_CASE("cli: help lists the commands that exist and no others", "[cli][unit]") {
  const std::string help = run_formsieve({"--help"}).out;
  for (const char* command :
       {"survey DATA", "draft DATA", "search PLAN", "show RUN", "compare RUN", "apply RUN", "equation RUN"})
    CHECK(has(help, command));
  for (const char* command : {"audit", "merge", "watch"}) CHECK_FALSE(has(help, command));
  for (const char* command : {"audit", "merge", "watch", "help"}) {
    CHECK(run_formsieve({command, "a.run"}).exit_code == 2);
  }
}

TEST_CASE("cli: the program alone shows its help and fails", "[cli][unit]") {
  const Outcome outcome = run_formsieve({});
  CHECK(outcome.exit_code == 2);
  CHECK(outcome.out.empty());
  CHECK(has(outcome.err, "survey DATA"));
}

TEST_CASE("cli: wrong arguments end with 2 and say what to type", "[cli][unit]") {
  struct Case {
    std::vector<std::string> arguments;
    std::string error, fix;
  };
  const std::vector<Case> cases = {
      {{"serch", "a.toml"}, "there is no command 'serch'", "did you mean formsieve search?"},
      {{"frobnicate"}, "there is no command 'frobnicate'", "formsieve --help lists the commands"},
      {{"survey"}, "formsieve survey needs DATA", "write formsieve survey DATA"},
      {{"draft", "a.csv"}, "formsieve draft needs --response", "write formsieve draft DATA --response COLUMN"},
      {{"survey", "a.csv", "--seperator", "tab"},
       "formsieve survey has no option --seperator",
       "did you mean --separator?"},
      {{"survey", "a.csv", "--zzz"}, "formsieve survey has no option --zzz", "formsieve survey --help lists"},
      {{"survey", "a.csv", "b.csv"}, "the argument 'b.csv' is one too many", "write formsieve survey DATA"},
      {{"show", "survey", "1", "2"},
       "the argument '2' is one too many",
       "write formsieve show RUN [RANK | --profile | --all]"},
      {{"--json", "survey", "a.csv"}, "--json stands before the command", "put options after the command"},
      {{"survey", "a.csv", "--threads"}, "--threads needs a value", "write --threads N"},
      {{"survey", "a.csv", "--threads", "two"}, "'two' is not a whole number of 1 to 1,024", "--threads 2"},
      {{"survey", "a.csv", "--threads", "0"}, "'0' is not a whole number", "--threads 2"},
      {{"survey", "a.csv", "--separator", "coma"}, "'coma' is not known", "did you mean comma?"},
      {{"survey", "a.csv", "--json=maybe"}, "--json", "formsieve survey --help"},
      {{"search", "a.csv", "--response", "y", "--folds", "1"}, "'1' is not a whole number of 2 or more", "--folds 10"},
      {{"search", "a.csv", "--response", "y", "--by", "aci"}, "'aci' is not known", "did you mean aic?"},
      {{"search", "a.csv", "--response", "y", "--budget", "soon"}, "--budget", "8h, 90m or 45s"},
      {{"search", "a.csv", "--response", "y", "--seed", "-3"}, "'-3' is not a whole number", "--seed 7"},
      {{"search", "a.csv"}, "does not know which column to predict", "formsieve survey a.csv lists the columns"},
  };
  for (const Case& one : cases) {
    CAPTURE(one.arguments);
    const Outcome outcome = run_formsieve(one.arguments);
    CHECK(outcome.exit_code == 2);
    CHECK(outcome.out.empty());
    const std::vector<std::string> lines = lines_of(outcome.err);
    REQUIRE(lines.size() == 2);
    CHECK(lines[0].starts_with("error: "));
    CHECK(has(lines[0], one.error));
    CHECK(lines[1].starts_with("fix: "));
    CHECK(has(lines[1], one.fix));
  }
}

TEST_CASE("cli: the last of a repeated option holds", "[cli][unit]") {
  const Outcome outcome = run_formsieve({"survey", "none.csv", "--threads", "1", "--threads", "2"});
  CHECK(outcome.exit_code == 3);  // it went on to look for the table
}

// How far the proof reaches: nodes, which are the same on every machine where no time limit ends a run, beside seconds
// of one thread, for the 100 best of simulated spaces. Printed as Markdown tables.
//
//   proof_bench [--sections cases,correlated,baselines,profile,large] [--seconds N] [--large-seconds N]
//
// --seconds is the limit of one run; where it ends one, the gap is printed by which the proven bound lies below the
// worst of the list.
#include "../tests/proof/simulated.hpp"
#include "proof/scope.hpp"
#include "proof/warm_start.hpp"
#include "stopwatch.hpp"
#include "superset_bound.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <iostream>
#include <string>
#include <vector>

namespace formsieve::bench {
namespace {

struct Options {
  std::string sections = "cases,correlated,baselines,profile,large";
  double seconds = 20.0;
  double large_seconds = 600.0;
};

constexpr std::size_t kKeep = 100;

struct Case {
  int n_predictors, n_rows;
  double r_squared;
  const char* criterion;
  double correlation = 0.3;
  int seed = 1;
  int n_responses = 1;
};

/// Keeps what the RootGram refers to where it is.
struct Stage {
  explicit Stage(const Case& c) : simulated(test::simulate(options_of(c))), root(connected()) {}

  static test::SimulatedOptions options_of(const Case& c) {
    test::SimulatedOptions options;
    options.n_predictors = c.n_predictors;
    options.n_forms = 6;
    options.n_rows = c.n_rows;
    options.r_squared = c.r_squared;
    options.criterion = c.criterion;
    options.correlation = c.correlation;
    options.seed = c.seed;
    options.n_responses = c.n_responses;
    return options;
  }
  const proof::Problem& connected() {
    simulated.problem.space = &simulated.space;
    simulated.problem.grams = &simulated.grams;
    return simulated.problem;
  }

  test::Simulated simulated;
  proof::RootGram root;
};

std::string name_of(const Case& c) {
  char text[120];
  std::snprintf(text, sizeof text, "%d × 6, n = %d, R² %.1f, %s", c.n_predictors, c.n_rows, c.r_squared, c.criterion);
  std::string name = text;
  if (c.correlation > 0.5) {
    std::snprintf(text, sizeof text, ", correlation %.1f, seed %d", c.correlation, c.seed);
    name += text;
  }
  return name;
}

std::string outcome(bool proved, double gap) {
  if (proved) return "proved";
  char text[40];
  std::snprintf(text, sizeof text, "open, gap %.3g", gap);
  return text;
}

double worst_of(const proof::Proof& result) {
  return result.best.empty() ? std::numeric_limits<double>::infinity() : result.best.back().score;
}

void print_row(const std::string& name, std::uint64_t nodes, double seconds, const std::string& end) {
  std::printf("| %s | %llu | %.3g | %s |\n", name.c_str(), static_cast<unsigned long long>(nodes), seconds,
              end.c_str());
  std::fflush(stdout);
}

proof::Proof run(const Stage& stage, const std::string& name, double seconds, const proof::Effort& effort) {
  proof::Limits limits;
  limits.keep = kKeep;
  limits.threads = 1;
  limits.enough = after_seconds(seconds);
  proof::Proof result;
  const double taken = clock_seconds([&] { result = proof::prove(stage.root, {}, limits, {}, effort); });
  print_row(name, result.nodes, taken, outcome(result.proved, worst_of(result) - result.lower_bound));
  return result;
}

void print_heading(const char* what) { std::printf("| %s | nodes | s | |\n|---|---|---|---|\n", what); }

void cases_section(const std::vector<Case>& cases, const char* heading, double seconds) {
  print_heading(heading);
  for (const Case& c : cases) run(Stage(c), name_of(c), seconds, {});
  std::printf("\n");
}

const std::vector<Case> kCases = {{12, 300, 0.8, "AIC"},  {20, 300, 0.5, "AIC"},   {30, 300, 0.5, "AIC"},
                                  {30, 150, 0.8, "AIC"},  {40, 3000, 0.8, "AIC"},  {40, 300, 0.8, "AIC"},
                                  {40, 300, 0.5, "BIC"},  {50, 300, 0.8, "AIC"},   {50, 300, 0.8, "BIC"},
                                  {60, 1000, 0.8, "AIC"}, {100, 3000, 0.8, "AIC"}, {200, 3000, 0.8, "AIC"}};
const std::vector<Case> kCorrelated = {{20, 300, 0.8, "AIC", 0.9},
                                       {30, 300, 0.8, "AIC", 0.9, 1},
                                       {30, 300, 0.8, "AIC", 0.9, 2},
                                       {30, 300, 0.8, "AIC", 0.9, 3},
                                       {40, 300, 0.8, "AIC", 0.9}};
const std::vector<Case> kLarge = {{500, 2000, 0.8, "AIC"}};

/// The bounds one after the other, from the plain one to what the program does.
bool baselines_of(const Case& c, double seconds) {
  const Stage stage(c);
  std::printf("**%s**\n\n", name_of(c).c_str());
  print_heading("bound");
  const proof::Proof best = run(stage, "the program", seconds, {});
  const double threshold = worst_of(best);
  bool agree = true;
  for (const Superset bound : {Superset::plain, Superset::largest_drop}) {
    SupersetProof result;
    const double taken = clock_seconds([&] { result = prove_by_superset(stage.root, bound, threshold, seconds); });
    print_row(
        bound == Superset::plain ? "all open columns fitted, told the result" : "largest drop cost, told the result",
        result.nodes, taken, outcome(result.proved, result.gap));
    agree = agree && (!best.proved || !result.proved || result.n_listed == best.best.size());
  }
  proof::Effort first, sweeps, newton;
  first.newton = sweeps.newton = false;
  first.root_sweeps = first.node_sweeps = 0;
  newton.sweeps_work = 0.0;
  for (const auto& [name, effort] :
       {std::pair{"additive, scaled conditional Gram", first}, std::pair{"additive, sweeps alone", sweeps},
        std::pair{"additive, Newton's method alone", newton}}) {
    const proof::Proof result = run(stage, name, seconds, effort);
    agree = agree && (!best.proved || !result.proved || worst_of(result) == threshold);
  }
  std::printf("\n");
  return agree;
}

bool baselines_section(double seconds) {
  bool agree = true;
  for (const std::size_t i : {0U, 1U, 2U, 4U, 6U}) agree = baselines_of(kCases[i], seconds) && agree;
  return agree;
}

/// Every form and absence of every predictor that the list does not settle, each by a proof of its own.
void print_profile(const Stage& stage, const proof::Proof& best, const char* name, const proof::WarmStart* start,
                   double already) {
  double seconds = already;
  std::uint64_t nodes = 0;
  std::size_t n_open = 0;
  const auto& predictors = stage.simulated.space.predictors;
  for (std::size_t j = 0; j < predictors.size(); ++j) {
    for (std::uint16_t choice = 0; choice <= predictors[j].forms.size(); ++choice) {
      const auto has = [&](const proof::Listed& listed) { return listed.choice.choice[j] == choice; };
      if (std::any_of(best.best.begin(), best.best.end(), has)) continue;
      proof::Restriction forced;
      forced.actions.emplace_back(j, proof::Actions{1} << choice);
      std::vector<search::Choice> hints;
      for (std::size_t i = 0; i < std::min<std::size_t>(12, best.best.size()); ++i) {
        hints.push_back(best.best[i].choice);
        hints.back().choice[j] = choice;
      }
      proof::Limits limits;
      limits.keep = 1;
      limits.threads = 1;
      limits.start = start;
      proof::Proof one;
      seconds += clock_seconds([&] { one = proof::prove(stage.root, forced, limits, hints); });
      nodes += one.nodes;
      n_open += one.proved ? 0 : 1;
    }
  }
  print_row(name, nodes, seconds, outcome(n_open == 0, 0.0));
}

void profile_section(double seconds) {
  for (const double r_squared : {0.5, 0.8}) {
    Case c{20, 300, r_squared, "AIC"};
    c.n_responses = 3;
    const Stage stage(c);
    std::printf("**%s, 3 response forms: what every form and absence costs**\n\n", name_of(c).c_str());
    print_heading("proofs");
    const proof::Proof best = run(stage, "the 100 best", seconds, {});
    print_profile(stage, best, "all forced choices, each from the beginning", nullptr, 0.0);
    proof::WarmStart start;
    const double taken = clock_seconds([&] { start = proof::warm_start(stage.root, {}, 1); });
    print_profile(stage, best, "all forced choices from one start", &start, taken);
    std::printf("\n");
  }
}

bool has_section(const Options& options, const std::string& name) {
  return ("," + options.sections + ",").find("," + name + ",") != std::string::npos;
}

Options parse(int argc, char** argv) {
  Options options;
  for (int i = 1; i < argc; i += 2) {
    const std::string name = argv[i];
    const char* const value = i + 1 < argc ? argv[i + 1] : nullptr;
    if (value != nullptr && name == "--sections")
      options.sections = value;
    else if (value != nullptr && name == "--seconds")
      options.seconds = std::atof(value);
    else if (value != nullptr && name == "--large-seconds")
      options.large_seconds = std::atof(value);
    else
      std::cerr << "not an option with a value: " << name << "\n", std::exit(2);
  }
  return options;
}

int run(const Options& options) {
  if (has_section(options, "cases")) cases_section(kCases, "the 100 best", options.seconds);
  if (has_section(options, "correlated")) cases_section(kCorrelated, "neighbours correlated", options.seconds);
  bool agree = true;
  if (has_section(options, "baselines")) agree = baselines_section(options.seconds);
  if (has_section(options, "profile")) profile_section(options.seconds);
  if (has_section(options, "large")) cases_section(kLarge, "the 100 best", options.large_seconds);
  if (!agree) std::printf("THE LISTS DISAGREE\n");
  return agree ? 0 : 1;
}

}  // namespace
}  // namespace formsieve::bench

int main(int argc, char** argv) { return formsieve::bench::run(formsieve::bench::parse(argc, argv)); }

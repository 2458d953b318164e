// How much of a large space the bounded walk visits: candidates visited beside the space's size, which are repeatable,
// nodes, leaves and seconds, printed as a Markdown table; with the bound by every form that is left as the baseline.
//
//   bounded_walk_bench [--only TEXT] [--leaf CANDIDATES] [--seconds LIMIT] [--threads N] [--superset]
#include "proof/bounded_walk.hpp"
#include "strong_predictors.hpp"
#include "stopwatch.hpp"

#include <cstdio>
#include <cstdlib>
#include <iostream>
#include <string>
#include <vector>

namespace formsieve::bench {
namespace {

struct Options {
  std::string only;
  double leaf = 0.0;  ///< 0: the default
  double seconds = 60.0;
  unsigned threads = 1;
  bool superset = false;
};

struct Case {
  StrongShape shape;
  std::size_t keep = 100;
};

std::string name_of(const Case& c) {
  char text[120];
  std::snprintf(text, sizeof text, "%zu × %zu, %zu strong, noise %.1f, n = %zu, list of %zu", c.shape.n_predictors,
                c.shape.n_forms, c.shape.n_strong, c.shape.noise, c.shape.n_rows, c.keep);
  return text;
}

std::vector<Case> cases() {
  std::vector<Case> all;
  for (const std::size_t keep : {100, 2000}) {
    all.push_back({{12, 6, 4, 400, 0.6}, keep});
    all.push_back({{14, 6, 5, 400, 0.3}, keep});
    all.push_back({{14, 6, 5, 400, 0.6}, keep});
    all.push_back({{14, 6, 5, 2000, 0.6}, keep});
    all.push_back({{18, 6, 8, 400, 0.3}, keep});
    all.push_back({{18, 6, 8, 2000, 0.3}, keep});
    all.push_back({{20, 6, 8, 2000, 0.3}, keep});
  }
  return all;
}

void run(const Case& c, const Options& options) {
  const Problem problem = simulate_strong(c.shape);
  const auto grams = design::build_grams(problem.data, problem.folds, options.threads);
  if (!grams) {
    std::cerr << grams.error().message << "\n";
    std::exit(1);
  }
  proof::BoundedWalkOptions walk;
  walk.keep = c.keep;
  walk.threads = options.threads;
  walk.seconds = options.seconds;
  walk.effort.superset = options.superset;
  if (options.leaf > 0.0) walk.effort.leaf_size = static_cast<std::uint64_t>(options.leaf);
  proof::BoundedWalk result;
  const double seconds = (options.threads == 1 ? thread_seconds : clock_seconds)([&] { result = proof::bounded_walk(problem.space, *grams, {1, 1.0}, walk); });
  const proof::BoundedCounts& counts = result.counts[0];
  const auto size = search::count(problem.space).convert_to<double>();
  const auto visits = static_cast<double>(counts.n_scored);
  std::printf("| %s | %.1e | %.2e | %.1e | %.1e | %llu | %llu | %.1f |%s\n", name_of(c).c_str(), size, visits,
              visits / size, counts.n_open.convert_to<double>() / size, static_cast<unsigned long long>(counts.n_nodes),
              static_cast<unsigned long long>(counts.n_leaves), seconds, result.complete ? "" : " open");
  std::fflush(stdout);
}

Options parse(int argc, char** argv) {
  Options options;
  for (int i = 1; i < argc; ++i) {
    const std::string name = argv[i];
    const auto value = [&]() -> std::string { return i + 1 < argc ? argv[++i] : ""; };
    if (name == "--only") options.only = value();
    if (name == "--leaf") options.leaf = std::atof(value().c_str());
    if (name == "--seconds") options.seconds = std::atof(value().c_str());
    if (name == "--threads") options.threads = static_cast<unsigned>(std::atoi(value().c_str()));
    if (name == "--superset") options.superset = true;
  }
  return options;
}

}  // namespace
}  // namespace formsieve::bench

int main(int argc, char** argv) {
  using namespace formsieve::bench;
  const Options options = parse(argc, argv);
  std::printf("| predictors × forms | candidates | visited | share | open | nodes | leaves | seconds |\n");
  std::printf("| --- | --- | --- | --- | --- | --- | --- | --- |\n");
  for (const Case& c : cases())
    if (name_of(c).find(options.only) != std::string::npos) run(c, options);
  return 0;
}

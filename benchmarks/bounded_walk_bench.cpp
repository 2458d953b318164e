// How much of a large space the bounded walk visits: candidates visited beside the space's size, which are repeatable,
// nodes, leaves and seconds, printed as a Markdown table; with the bound by every form that is left as the baseline.
//
//   bounded_walk_bench [--only TEXT] [--leaf CANDIDATES] [--seconds LIMIT] [--threads N] [--superset]
//
// Seconds are those of one thread where one is asked for. "Open" is the share of candidates that the time limit left.
#include <formsieve/pipeline.hpp>
#include <formsieve/table.hpp>

#include "pipeline/prepare.hpp"
#include "proof/bounded_estimate.hpp"
#include "proof/bounded_walk.hpp"
#include "strong_predictors.hpp"
#include "stopwatch.hpp"

#include <algorithm>
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
  proof::EstimateEffort estimate;
};

std::vector<StrongShape> shapes() {
  return {{12, 6, 4, 400, 0.6}, {14, 6, 5, 400, 0.3},  {14, 6, 5, 400, 0.6}, {14, 6, 5, 2000, 0.6},
          {18, 6, 8, 400, 0.3}, {18, 6, 8, 2000, 0.3}, {20, 6, 8, 2000, 0.3}};
}

template <class Value>
Value checked(Result<Value> result) {
  if (result) return std::move(*result);
  std::cerr << result.error().message << "\n";
  std::exit(1);
}

/// What a bounded walk works on.
struct Table {
  std::string name;
  design::Data data;
  design::Folds folds;
  search::Space space;
};

double largest_weight(const design::Data& data) {
  return data.weights.empty() ? 1.0 : *std::max_element(data.weights.begin(), data.weights.end());
}

void run(const Table& table, std::size_t keep, const Options& options) {
  const base::GramSet grams = checked(design::build_grams(table.data, table.folds, options.threads));
  const proof::HeldOutRows rows{table.folds.repeats, largest_weight(table.data)};
  proof::BoundedWalkOptions walk;
  walk.keep = keep;
  walk.threads = options.threads;
  walk.effort.superset = options.superset;
  if (options.leaf > 0.0) walk.effort.leaf_size = static_cast<std::uint64_t>(options.leaf);
  proof::BoundedWalk result;
  const auto measure = options.threads == 1 ? thread_seconds : clock_seconds;
  walk.enough = after_seconds(options.seconds);
  const double seconds = measure([&] { result = proof::bounded_walk(table.space, grams, rows, walk); });
  std::vector<proof::VisitEstimate> estimates;
  const double estimate_seconds =
      measure([&] { estimates = proof::estimate_visits(table.space, grams, rows, walk, options.estimate); });
  for (std::size_t r = 0; r < estimates.size(); ++r) {
    const proof::BoundedCounts& counts = result.counts[r];
    const double size = search::count(table.space).convert_to<double>() / static_cast<double>(estimates.size());
    const double visits = static_cast<double>(counts.n_scored) + counts.n_inseparable.convert_to<double>();
    std::printf(
        "| %s, list of %zu, response %zu | %.1e | %.2e | %.1e | %.1e | %llu | %llu | %.1f | %.2e ± %.0e | %.1f |\n",
        table.name.c_str(), keep, r + 1, size, visits, visits / size, counts.n_open.convert_to<double>() / size,
        static_cast<unsigned long long>(counts.n_nodes), static_cast<unsigned long long>(counts.n_leaves), seconds,
        estimates[r].visits, estimates[r].standard_error, estimate_seconds);
  }
  std::fflush(stdout);
}

Table simulated(const StrongShape& shape) {
  char name[120];
  std::snprintf(name, sizeof name, "%zu × %zu, %zu strong, noise %.1f, n = %zu", shape.n_predictors, shape.n_forms,
                shape.n_strong, shape.noise, shape.n_rows);
  Problem problem = simulate_strong(shape);
  return {name, std::move(problem.data), std::move(problem.folds), std::move(problem.space)};
}

/// The demo's table as `formsieve search` takes it without a plan.
Table demo() {
  run::Plan plan;
  plan.data.file = std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv";
  plan.data.response = "energy_kwh";
  plan.data.ignore = {"store"};
  pipeline::Prepared prepared = checked(pipeline::prepare(checked(table::read_csv(plan.data.file, {})), plan));
  return {"coldstores", std::move(prepared.data), std::move(prepared.folds), std::move(prepared.space)};
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
  std::printf(
      "| predictors × forms | candidates | visited | share | open | nodes | leaves | seconds | estimated visits | its "
      "seconds |\n");
  std::printf("| --- | --- | --- | --- | --- | --- | --- | --- | --- | --- |\n");
  std::vector<Table> tables = {demo()};
  for (const StrongShape& shape : shapes()) tables.push_back(simulated(shape));
  for (const std::size_t keep : {100, 2000})
    for (const Table& table : tables)
      if ((table.name + ", list of " + std::to_string(keep)).find(options.only) != std::string::npos)
        run(table, keep, options);
  return 0;
}

// How fast the search is: the walk beside a loop of multiplications that does nothing else, beside the obvious ways of
// scoring the same candidates, and as the problem grows; the Gram matrices beside a library's. All in one run, printed
// as Markdown tables of ratios.
//
//   walk_bench [--sections walk,others,growth,grams,extras] [--gram-rows N] [--repeats N]
//
// Times of one thread are processor seconds of that thread, the best of several; a busy machine slows them through its
// caches and shared cores all the same, so that only the ratios carry over. About two minutes.
#include "base/parallel.hpp"
#include "base/sums.hpp"
#include "design/moments.hpp"
#include "design/standardise.hpp"
#include "fma_rate.hpp"
#include "obvious_ways.hpp"
#include "simulated.hpp"
#include "stopwatch.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <fstream>
#include <functional>
#include <iostream>
#include <limits>
#include <numeric>
#include <string>
#include <vector>

namespace formsieve::bench {
namespace {

struct Options {
  std::string sections = "walk,others,growth,grams,extras";
  std::size_t gram_rows = 200'000;
  int repeats = 5;
};

/// A shape with the vector operations (multiplications, additions, minima, estimates of reciprocals) that the kernel of
/// search/pair_kernel.cpp issues for each candidate with vectors of eight doubles, summed over the tree: 12 + 6R for a
/// vector of pairs in a fold (R responses), 9 + 6R in all rows, 4 + 3R for a vector of columns brought in, 6 + 6R more
/// where they are rows; masks, loads, stores and the lists are not counted. To be renewed when the kernel changes.
struct NamedShape {
  const char* name;
  Shape shape;
  double operations;
};
const NamedShape kShapes[] = {{"8 predictors × 6 forms, 1 response", {8, 6, 1}, 39.3},
                              {"8 × 6, 3 responses", {8, 6, 3}, 22.5},
                              {"12 × 4, 3 responses, at most 6 terms", {12, 4, 3, 6}, 21.4}};

base::GramSet grams_of(const Problem& problem) {
  auto grams = design::build_grams(problem.data, problem.folds, 1);
  if (!grams) {
    std::cerr << grams.error().message << "\n";
    std::exit(1);
  }
  return std::move(*grams);
}

/// One walk: seconds of its thread for a candidate, and the same in vector operations at the rate of that moment.
struct WalkTime {
  double seconds = std::numeric_limits<double>::infinity();  ///< of one candidate
  double operations = std::numeric_limits<double>::infinity();
  double candidates = 0.0;
};

WalkTime time_walk(const Problem& problem, const base::GramSet& grams, const search::WalkOptions& options,
                   int repeats) {
  WalkTime best;
  best.candidates = search::count(problem.space).convert_to<double>();
  double rate = fma_per_second();
  for (int i = 0; i < repeats; ++i) {
    const double seconds = thread_seconds([&] { (void)search::walk(problem.space, grams, options); }) / best.candidates;
    const double rate_after = fma_per_second();
    best.seconds = std::min(best.seconds, seconds);
    best.operations = std::min(best.operations, seconds * 0.5 * (rate + rate_after));
    rate = rate_after;
  }
  return best;
}

std::string processor_name() {
  std::ifstream file("/proc/cpuinfo");
  for (std::string line; std::getline(file, line);)
    if (line.rfind("model name", 0) == 0) return line.substr(line.find(':') + 2);
  return "unknown processor";
}

std::string today() {
  const std::time_t now = std::time(nullptr);
  char text[32];
  std::strftime(text, sizeof text, "%Y-%m-%d", std::localtime(&now));
  return text;
}

void print_heading() {
  std::printf("%s, %s, %s, %u threads allowed; one core issues %.2f thousand million vector operations a second\n\n",
              today().c_str(), processor_name().c_str(), base::instruction_set().c_str(), base::available_threads(),
              fma_per_second() / 1e9);
}

void walk_section(const Options& options) {
  std::printf(
      "| space (10 folds, held-out error and AIC of every candidate) | candidates | million a second | vector "
      "operations' time each | share of peak |\n|---|---|---|---|---|\n");
  for (const NamedShape& named : kShapes) {
    const Problem problem = simulate(named.shape);
    const WalkTime time = time_walk(problem, grams_of(problem), walk_options(problem), options.repeats);
    std::printf("| %s | %.0f | %.1f | %.1f |", named.name, time.candidates, 1e-6 / time.seconds, time.operations);
    std::printf(" %.0f %% |\n", 100.0 * named.operations / time.operations);
    std::fflush(stdout);
  }
  std::printf("\n");
}

/// Seconds for one candidate of a sample, the best of three passes over it.
double time_sample(const std::vector<CandidateColumns>& sample,
                   const std::function<double(const CandidateColumns&)>& score) {
  volatile double sink = 0.0;
  return best_thread_seconds(3,
                             [&] {
                               for (const auto& one : sample) sink = sink + score(one);
                             }) /
         static_cast<double>(sample.size());
}

void print_other(const char* way, double seconds, const WalkTime& walk) {
  if (seconds < 0.0)
    std::printf("| %s | not on this machine | |\n", way);
  else
    std::printf("| %s | %.0f | %.3g |\n", way, 1.0 / seconds, seconds / walk.seconds);
  std::fflush(stdout);
}

/// The largest difference between the ways, and from the walk for its best candidates, relative.
double disagreement(const Problem& problem, const base::GramSet& grams, const ReadyColumns& data) {
  double worst = 0.0;
  const auto compare = [&](double a, double b) { worst = std::max(worst, std::abs(a - b) / std::abs(b)); };
  for (const auto& candidate : sample_candidates(problem, 20, 5)) {
    const double reference = cv_by_householder(data, candidate);
    compare(cv_by_cholesky(grams, candidate), reference);
    if (has_lapack()) compare(cv_by_lapack(data, candidate), reference);
  }
  const search::WalkResult walked = search::walk(problem.space, grams, walk_options(problem));
  for (const search::Scored& scored : walked.lists[0][0]) {
    const double scale = grams.response_scale[0];
    compare(scored.cv_sse / (scale * scale), cv_by_householder(data, columns_of(problem, scored.choice)));
  }
  return worst;
}

bool others_section(const Options& options) {
  bool agree = true;
  for (const std::size_t n_rows : {500u, 5000u}) {
    Shape shape = kShapes[0].shape;
    shape.n_rows = n_rows;
    const Problem problem = simulate(shape);
    const base::GramSet grams = grams_of(problem);
    const ReadyColumns data = ready_columns(problem);
    const WalkTime walk = time_walk(problem, grams, walk_options(problem), options.repeats);
    const std::size_t n_sample = 200'000 / n_rows;
    const auto sample = sample_candidates(problem, n_sample, 1);
    std::printf("| %s, %zu rows, one thread | candidates a second | the walk is faster by |\n|---|---|---|\n",
                kShapes[0].name, n_rows);
    std::printf("| the walk | %.3g | 1 |\n", 1.0 / walk.seconds);
    print_other(
        "Cholesky of each candidate's part of the Gram matrices, each fold (Eigen LLT)",
        time_sample(sample_candidates(problem, 20'000, 2), [&](const auto& c) { return cv_by_cholesky(grams, c); }),
        walk);
    print_other("QR of the rows, each fold (Eigen HouseholderQR)",
                time_sample(sample, [&](const auto& c) { return cv_by_householder(data, c); }), walk);
    print_other("QR of the rows, each fold (LAPACK dgels as installed)",
                has_lapack() ? time_sample(sample, [&](const auto& c) { return cv_by_lapack(data, c); }) : -1.0, walk);
    print_other("numpy.linalg.lstsq, each fold, in a loop", numpy_seconds(n_rows, 7, shape.n_folds), walk);
    const double worst = disagreement(problem, grams, data);
    std::printf("\nlargest relative difference of their held-out errors: %.1e\n\n", worst);
    agree = agree && worst < 1e-8;
  }
  return agree;
}

/// Seconds of the Gram matrices and of the walk for one shape.
void print_growth(const char* what, std::size_t value, const Shape& shape, int repeats) {
  const Problem problem = simulate(shape);
  base::GramSet grams;
  const double building = best_thread_seconds(3, [&] { grams = grams_of(problem); });
  const WalkTime walk = time_walk(problem, grams, walk_options(problem), repeats);
  std::printf("| %s = %zu | %.4f | %.0f | %.4f | %.1f |\n", what, value, building, walk.candidates,
              walk.seconds * walk.candidates, walk.operations);
  std::fflush(stdout);
}

void print_threads(int repeats) {
  const Problem problem = simulate({8, 6, 3});
  const base::GramSet grams = grams_of(problem);
  double one = 0.0;
  for (const unsigned threads : {1u, 2u}) {
    search::WalkOptions options = walk_options(problem);
    options.threads = threads;
    double best = std::numeric_limits<double>::infinity();
    for (int i = 0; i < repeats; ++i)
      best = std::min(best, clock_seconds([&] { (void)search::walk(problem.space, grams, options); }));
    if (threads == 1) one = best;
    std::printf("| threads = %u, 8 × 6 × 3, on the clock | | | %.4f | %.2f times one thread |\n", threads, best,
                one / best);
  }
}

void growth_section(const Options& options) {
  std::printf(
      "| growth from 8 × 4, 1 response, 500 rows, 10 folds | Gram matrices, s | candidates | walk, s | vector "
      "operations' time each |\n|---|---|---|---|---|\n");
  const Shape base{8, 4, 1};
  const auto with = [&](const auto& change) {
    Shape shape = base;
    change(shape);
    return shape;
  };
  for (const std::size_t n : {1'000u, 100'000u, 1'000'000u})
    print_growth("rows", n, with([&](Shape& s) { s.n_rows = n; }), options.repeats);
  for (const std::size_t n : {6u, 7u, 8u, 9u})
    print_growth("predictors", n, with([&](Shape& s) { s.n_predictors = n; }), options.repeats);
  for (const std::size_t n : {2u, 4u, 6u, 8u})
    print_growth("forms", n, with([&](Shape& s) { s.n_forms = n, s.n_predictors = 6; }), options.repeats);
  for (const std::size_t n : {5u, 10u, 20u})
    print_growth("folds", n, with([&](Shape& s) { s.n_folds = n; }), options.repeats);
  for (const std::size_t n : {1u, 2u, 3u})
    print_growth("responses", n, with([&](Shape& s) { s.n_responses = n; }), options.repeats);
  print_threads(options.repeats);
  std::printf("\n(forms: 6 predictors)\n\n");
}

/// Blocks of standardised values as build_grams makes them, a few that go round.
struct Blocks {
  static constexpr std::size_t kCount = 8;
  std::size_t order = 0;
  std::vector<std::vector<double>> values;
};

Blocks make_blocks(const Problem& problem) {
  const auto standard = design::StandardColumns::fit(problem.data, 1);
  if (!standard) std::exit(1);
  Blocks blocks{standard->order(), {}};
  for (std::size_t b = 0; b < Blocks::kCount; ++b) {
    std::vector<std::uint32_t> rows(base::kRowChunk);
    std::iota(rows.begin(), rows.end(), static_cast<std::uint32_t>(b * base::kRowChunk));
    blocks.values.emplace_back(blocks.order * base::kRowChunk);
    standard->evaluate(problem.data, rows, blocks.values.back());
  }
  return blocks;
}

void grams_section(const Options& options) {
  std::printf(
      "| Gram matrices of 30 predictors × 4 forms, 2 responses, %zu rows | s | share of FMA peak | times Eigen "
      "|\n|---|---|---|---|\n",
      options.gram_rows);
  const Problem problem = simulate({30, 4, 2, std::nullopt, options.gram_rows});
  const Blocks blocks = make_blocks(problem);
  const std::size_t n_blocks = options.gram_rows / base::kRowChunk;
  const double order = static_cast<double>(blocks.order);
  const auto operations = [&](double n_rows) {
    return n_rows * order * (order + 1.0) / 2.0 / static_cast<double>(fma_lanes());
  };
  double rate = 0.0;
  double library = std::numeric_limits<double>::infinity();
  double own = library;
  double all = library;
  for (int i = 0; i < options.repeats; ++i) {
    rate = std::max(rate, fma_per_second());
    std::vector<double> gram(blocks.order * blocks.order);
    library = std::min(library, thread_seconds([&] {
                         for (std::size_t b = 0; b < n_blocks; ++b)
                           add_by_rank_update(blocks.values[b % Blocks::kCount].data(), base::kRowChunk,
                                              base::kRowChunk, blocks.order, gram.data());
                       }));
    design::Moments sums;
    design::BlockWorkspace workspace;
    own = std::min(
        own, thread_seconds([&] {
          for (std::size_t b = 0; b < n_blocks; ++b)
            add_block(sums, {base::kRowChunk, blocks.order, blocks.values[b % Blocks::kCount].data()}, {}, workspace);
        }));
    all = std::min(all, thread_seconds([&] { (void)grams_of(problem); }));
  }
  const auto print = [&](const char* what, double seconds, double n_rows) {
    std::printf("| %s | %.3f | %.0f %% | %.2f |\n", what, seconds, 100.0 * operations(n_rows) / (seconds * rate),
                library / seconds);
  };
  const double block_rows = static_cast<double>(n_blocks * base::kRowChunk);
  print("Eigen rankUpdate, ready blocks of 1,024 rows, products alone", library, block_rows);
  print("the same blocks here, centred, with their means", own, block_rows);
  print("everything: forms, standardisation, 10 folds", all, static_cast<double>(options.gram_rows));
  std::printf("\n");
}

void extras_section(const Options& options) {
  std::printf("| besides | times the plain walk |\n|---|---|\n");
  for (const NamedShape& named : kShapes) {
    const Problem problem = simulate(named.shape);
    const base::GramSet grams = grams_of(problem);
    search::WalkOptions with = walk_options(problem);
    with.summary_penalty = aic_penalty(problem);
    const WalkTime plain = time_walk(problem, grams, walk_options(problem), options.repeats);
    const WalkTime summary = time_walk(problem, grams, with, options.repeats);
    std::printf("| summary of the whole space, %s | %.2f |\n", named.name, summary.operations / plain.operations);
    std::fflush(stdout);
  }
  std::printf("\n");
}

bool has_section(const Options& options, const std::string& name) {
  return ("," + options.sections + ",").find("," + name + ",") != std::string::npos;
}

Options parse(int argc, char** argv) {
  Options options;
  for (int i = 1; i + 1 < argc; i += 2) {
    const std::string name = argv[i];
    if (name == "--sections")
      options.sections = argv[i + 1];
    else if (name == "--gram-rows")
      options.gram_rows = std::max<std::size_t>(std::stoul(argv[i + 1]), Blocks::kCount * base::kRowChunk);
    else if (name == "--repeats")
      options.repeats = std::max(1, std::stoi(argv[i + 1]));
    else
      i = argc;  // said below
    if (i >= argc) std::cerr << "unknown option " << name << "\n", std::exit(2);
  }
  return options;
}

int run(int argc, char** argv) {
  const Options options = parse(argc, argv);
  print_heading();
  bool agree = true;
  if (has_section(options, "walk")) walk_section(options);
  if (has_section(options, "others")) agree = others_section(options);
  if (has_section(options, "growth")) growth_section(options);
  if (has_section(options, "grams")) grams_section(options);
  if (has_section(options, "extras")) extras_section(options);
  if (!agree) std::printf("THE WAYS DISAGREE\n");
  return agree ? 0 : 1;
}

}  // namespace
}  // namespace formsieve::bench

int main(int argc, char** argv) { return formsieve::bench::run(argc, argv); }

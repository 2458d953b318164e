// Speed of the examination on one thread: scoring pooled candidates (refit on all rows and without each of ten folds,
// own-units error from held-out rows, likelihood) beside refitting the same designs by LAPACK, and the full record of a
// listed candidate (checks, influence, robust fit, corrections, intervals, effects).
//
//   examine_bench [ROWS]
#include "stopwatch.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/run.hpp>

#include "base/random.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <numeric>
#include <string>
#include <vector>

#ifdef FORMSIEVE_HAS_LAPACKE
#include <lapacke.h>
#endif

namespace {

using namespace formsieve;
using bench::best_thread_seconds;
using Eigen::Index;

constexpr std::size_t kPredictors = 8;
constexpr std::size_t kPool = 2000;           // what a plan pools by default
constexpr std::size_t kMostWork = 8'000'000;  // rows × candidates of a timing
constexpr std::size_t kListed = 5;

/// ln y straight in the logarithms of eight positive columns, written as a table.
void write_table(const std::string& file, std::size_t n_rows) {
  base::SplitMix64 random(20261201);
  const auto uniform = [&random] { return (static_cast<double>(random.next() >> 11) + 0.5) * 0x1p-53; };
  std::ofstream out(file);
  out << "y";
  for (std::size_t j = 0; j < kPredictors; ++j) out << ",x" << j;
  out << '\n';
  for (std::size_t i = 0; i < n_rows; ++i) {
    double z = 0.3 * (uniform() + uniform() + uniform() + uniform() - 2.0);
    std::string row;
    for (std::size_t j = 0; j < kPredictors; ++j) {
      const double x = 1.0 + 99.0 * uniform();
      z += 0.1 * std::log(x);
      row += "," + std::to_string(x);
    }
    out << std::exp(z) << row << '\n';
  }
}

std::vector<search::Choice> random_choices(const search::Space& space, std::size_t count) {
  base::SplitMix64 random(7);
  std::vector<search::Choice> choices(count);
  for (search::Choice& choice : choices) {
    choice.response = random.below(space.n_responses);
    for (const auto& predictor : space.predictors)
      choice.choice.push_back(static_cast<std::uint16_t>(1 + random.below(predictor.forms.size())));
  }
  return choices;
}

#ifdef FORMSIEVE_HAS_LAPACKE
/// Least squares on all rows and without each fold by dgels; the designs are ready. Returns the coefficients' sum.
double by_lapack(const Eigen::MatrixXd& x, const Eigen::VectorXd& z, const design::Folds& folds) {
  double sum = 0.0;
  for (std::size_t fold = 0; fold <= folds.count; ++fold) {
    std::vector<Index> rows;
    for (Index i = 0; i < x.rows(); ++i)
      if (fold == folds.count || folds.fold_of[0][static_cast<std::size_t>(i)] != fold) rows.push_back(i);
    Eigen::MatrixXd part = x(rows, Eigen::all);
    Eigen::VectorXd right = z(rows);
    const auto n = static_cast<lapack_int>(part.rows()), p = static_cast<lapack_int>(part.cols());
    if (LAPACKE_dgels(LAPACK_COL_MAJOR, 'N', n, p, 1, part.data(), n, right.data(), n) != 0) std::abort();
    sum += right.head(p).sum();
  }
  return sum;
}

double lapack_seconds(const pipeline::Prepared& prepared, const std::vector<search::Choice>& choices) {
  std::vector<std::size_t> rows(prepared.data.n_rows);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  volatile double sink = 0.0;
  return best_thread_seconds(1, [&] {
    for (const auto& choice : choices)
      sink = sink + by_lapack(design::design_matrix(prepared.data, choice.choice, rows),
                              design::response_vector(prepared.data, choice.response, rows), prepared.folds);
  });
}
#endif

void print_line(const char* what, double seconds, std::size_t count, double reference) {
  std::printf("| %s | %.3f | %.2f |\n", what, 1000.0 * seconds / static_cast<double>(count), seconds / reference);
}

int measure(std::size_t n_rows) {
  const std::string file = "examine_bench.csv";
  write_table(file, n_rows);
  run::Plan plan;
  plan.data.file = file;
  plan.data.response = "y";
  auto table = pipeline::load_table(plan, 1);
  if (!table) return EXIT_FAILURE;
  const auto prepared = pipeline::prepare(std::move(*table), plan);
  std::remove(file.c_str());
  if (!prepared) return EXIT_FAILURE;
  const pipeline::Examiner examiner(*prepared);
  const std::size_t count = std::min(kPool, std::max<std::size_t>(3, kMostWork / n_rows));
  const auto choices = random_choices(prepared->space, count);

  std::vector<pipeline::Examined> scored(count);
  const double scoring = best_thread_seconds(1, [&] {
    for (std::size_t i = 0; i < count; ++i) scored[i] = examiner.score(choices[i], search::BigCount(i));
  });
  const std::size_t listed = std::min(kListed, count);
  const double completing = best_thread_seconds(1, [&] {
    for (std::size_t i = 0; i < listed; ++i)
      if (scored[i].candidate && !examiner.complete(choices[i], *scored[i].candidate)) std::abort();
  });
  std::printf("%zu rows, %zu candidates of %zu predictors, 10 folds, one thread\n\n", n_rows, count, kPredictors);
  std::printf("| | ms a candidate | times scoring |\n|---|---|---|\n");
  const double one = scoring / static_cast<double>(count);
  print_line("scoring a pooled candidate", scoring, count, scoring);
#ifdef FORMSIEVE_HAS_LAPACKE
  const double lapack = lapack_seconds(*prepared, choices);
  print_line("its least squares alone, on all rows and without each fold, by LAPACK dgels", lapack, count, scoring);
#endif
  print_line("the full record of a listed one", completing, listed, one * static_cast<double>(listed));
  std::printf("\na pool of %zu: %.2f s\n", kPool, one * static_cast<double>(kPool));
  return EXIT_SUCCESS;
}

}  // namespace

int main(int argc, char** argv) { return measure(argc > 1 ? std::strtoull(argv[1], nullptr, 10) : 1000); }

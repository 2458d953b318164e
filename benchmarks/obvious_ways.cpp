#include "obvious_ways.hpp"

#include "base/sums.hpp"
#include "design/standardise.hpp"

#include <Eigen/Dense>

#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <iostream>
#include <numeric>
#include <random>

#if defined(FORMSIEVE_HAS_LAPACKE)
#include <lapacke.h>
#endif

namespace formsieve::bench {

namespace {

using ColumnMap = Eigen::Map<const Eigen::MatrixXd>;
using GramMap = Eigen::Map<const Eigen::MatrixXd>;

/// The rows and columns of a candidate with an intercept in front.
Eigen::MatrixXd matrix_of(const ReadyColumns& data, const CandidateColumns& candidate, const std::vector<int>& rows) {
  Eigen::MatrixXd x(rows.size(), candidate.columns.size() + 1);
  x.col(0).setOnes();
  for (std::size_t c = 0; c < candidate.columns.size(); ++c) {
    const double* column = data.values.data() + static_cast<std::size_t>(candidate.columns[c]) * data.n_rows;
    double* out = x.data() + (c + 1) * rows.size();
    for (std::size_t i = 0; i < rows.size(); ++i) out[i] = column[rows[i]];
  }
  return x;
}

Eigen::VectorXd response_of(const ReadyColumns& data, const CandidateColumns& candidate, const std::vector<int>& rows) {
  const double* y = data.values.data() + (data.n_columns + static_cast<std::size_t>(candidate.response)) * data.n_rows;
  Eigen::VectorXd out(rows.size());
  for (std::size_t i = 0; i < rows.size(); ++i) out[static_cast<Eigen::Index>(i)] = y[rows[i]];
  return out;
}

double held_out_error(const ReadyColumns& data, const CandidateColumns& candidate, std::size_t fold,
                      const Eigen::VectorXd& coefficients) {
  const auto& rows = data.validation[fold];
  return (response_of(data, candidate, rows) - matrix_of(data, candidate, rows) * coefficients).squaredNorm();
}

}  // namespace

ReadyColumns ready_columns(const Problem& problem) {
  const auto standard = design::StandardColumns::fit(problem.data, 1);
  if (!standard) std::abort();
  ReadyColumns data;
  data.n_rows = problem.data.n_rows;
  data.n_responses = problem.data.response_forms.size();
  data.n_columns = standard->order() - data.n_responses;
  data.values.resize(data.n_rows * standard->order());
  std::vector<double> block(standard->order() * base::kRowChunk);
  for (std::size_t first = 0; first < data.n_rows; first += base::kRowChunk) {
    std::vector<std::uint32_t> rows(std::min(base::kRowChunk, data.n_rows - first));
    std::iota(rows.begin(), rows.end(), static_cast<std::uint32_t>(first));
    standard->evaluate(problem.data, rows, block);
    for (std::size_t c = 0; c < standard->order(); ++c)
      std::copy_n(block.data() + c * base::kRowChunk, rows.size(), data.values.data() + c * data.n_rows + first);
  }
  data.training.resize(problem.folds.count);
  data.validation.resize(problem.folds.count);
  for (std::size_t i = 0; i < data.n_rows; ++i)
    for (std::size_t f = 0; f < problem.folds.count; ++f)
      (problem.folds.fold_of[0][i] == f ? data.validation : data.training)[f].push_back(static_cast<int>(i));
  return data;
}

CandidateColumns columns_of(const Problem& problem, const search::Choice& choice) {
  CandidateColumns candidate;
  candidate.response = static_cast<int>(choice.response);
  for (std::size_t j = 0; j < choice.choice.size(); ++j)
    if (choice.choice[j] != 0)
      candidate.columns.push_back(
          static_cast<int>(problem.space.predictors[j].forms[choice.choice[j] - 1u].first_column));
  return candidate;
}

std::vector<CandidateColumns> sample_candidates(const Problem& problem, std::size_t n, std::uint64_t seed) {
  std::mt19937_64 random(seed);
  std::vector<CandidateColumns> sample;
  while (sample.size() < n) {
    search::Choice choice{random() % problem.space.n_responses, {}};
    for (const auto& predictor : problem.space.predictors)
      choice.choice.push_back(static_cast<std::uint16_t>(random() % (predictor.forms.size() + 1)));
    CandidateColumns candidate = columns_of(problem, choice);
    if (candidate.columns.size() <= problem.space.max_terms.value_or(choice.choice.size()))
      sample.push_back(std::move(candidate));
  }
  return sample;
}

double cv_by_householder(const ReadyColumns& data, const CandidateColumns& candidate) {
  double sum = 0.0;
  for (std::size_t fold = 0; fold < data.training.size(); ++fold) {
    const auto& rows = data.training[fold];
    const Eigen::VectorXd coefficients = Eigen::HouseholderQR<Eigen::MatrixXd>(matrix_of(data, candidate, rows))
                                             .solve(response_of(data, candidate, rows));
    sum += held_out_error(data, candidate, fold, coefficients);
  }
  return sum;
}

double cv_by_cholesky(const base::GramSet& grams, const CandidateColumns& candidate) {
  const auto order = static_cast<Eigen::Index>(grams.order());
  const auto k = static_cast<Eigen::Index>(candidate.columns.size());
  const auto y = static_cast<Eigen::Index>(grams.n_columns) + candidate.response;
  Eigen::MatrixXd a(k, k);
  Eigen::MatrixXd v(k, k);
  Eigen::VectorXd a_y(k);
  Eigen::VectorXd v_y(k);
  double sum = 0.0;
  for (std::size_t fold = 0; fold < grams.n_folds; ++fold) {
    const GramMap training(grams.training[fold].data(), order, order);
    const GramMap validation(grams.validation[fold].data(), order, order);
    for (Eigen::Index j = 0; j < k; ++j) {
      const int column = candidate.columns[static_cast<std::size_t>(j)];
      a_y[j] = training(column, y);
      v_y[j] = validation(column, y);
      for (Eigen::Index i = 0; i < k; ++i) {
        a(i, j) = training(candidate.columns[static_cast<std::size_t>(i)], column);
        v(i, j) = validation(candidate.columns[static_cast<std::size_t>(i)], column);
      }
    }
    const Eigen::VectorXd b = a.llt().solve(a_y);
    sum += validation(y, y) - 2.0 * b.dot(v_y) + b.dot(v * b);
  }
  return sum;
}

#if defined(FORMSIEVE_HAS_LAPACKE)

bool has_lapack() { return true; }

double cv_by_lapack(const ReadyColumns& data, const CandidateColumns& candidate) {
  double sum = 0.0;
  for (std::size_t fold = 0; fold < data.training.size(); ++fold) {
    const auto& rows = data.training[fold];
    Eigen::MatrixXd x = matrix_of(data, candidate, rows);
    Eigen::VectorXd y = response_of(data, candidate, rows);
    const auto n = static_cast<lapack_int>(x.rows());
    const auto k = static_cast<lapack_int>(x.cols());
    if (LAPACKE_dgels(LAPACK_COL_MAJOR, 'N', n, k, 1, x.data(), n, y.data(), n) != 0) std::abort();
    sum += held_out_error(data, candidate, fold, y.head(k));
  }
  return sum;
}

#else

bool has_lapack() { return false; }
double cv_by_lapack(const ReadyColumns&, const CandidateColumns&) { std::abort(); }

#endif

double numpy_seconds(std::size_t n_rows, std::size_t k, std::size_t n_folds) {
  const std::string command = "python3 - " + std::to_string(n_rows) + " " + std::to_string(k) + " " +
                              std::to_string(n_folds) +
                              " 2>/dev/null <<'END'\n"
                              "import os\n"
                              "os.environ['OPENBLAS_NUM_THREADS'] = os.environ['OMP_NUM_THREADS'] = '1'\n"
                              "import sys, time, numpy\n"
                              "n, k, folds = map(int, sys.argv[1:])\n"
                              "r = numpy.random.default_rng(1)\n"
                              "m = n - n // folds\n"
                              "x = numpy.column_stack([numpy.ones(m), r.normal(size=(m, k))])\n"
                              "y = r.normal(size=m)\n"
                              "best = 1e9\n"
                              "for repeat in range(5):\n"
                              "    start = time.process_time()\n"
                              "    for i in range(10 * folds):\n"
                              "        numpy.linalg.lstsq(x, y, rcond=None)\n"
                              "    best = min(best, (time.process_time() - start) / 10)\n"
                              "print(best)\nEND\n";
  std::FILE* const pipe = ::popen(command.c_str(), "r");
  double seconds = -1.0;
  if (pipe == nullptr) return seconds;
  if (std::fscanf(pipe, "%lf", &seconds) != 1) seconds = -1.0;
  ::pclose(pipe);
  return seconds;
}

void add_by_rank_update(const double* block, std::size_t n_rows, std::size_t stride, std::size_t n_columns,
                        double* gram) {
  const auto n = static_cast<Eigen::Index>(n_columns);
  const Eigen::Map<const Eigen::MatrixXd, 0, Eigen::OuterStride<>> x(
      block, static_cast<Eigen::Index>(n_rows), n, Eigen::OuterStride<>(static_cast<Eigen::Index>(stride)));
  Eigen::Map<Eigen::MatrixXd> sum(gram, n, n);
  sum.selfadjointView<Eigen::Lower>().rankUpdate(x.transpose(), 1.0);
}

}  // namespace formsieve::bench

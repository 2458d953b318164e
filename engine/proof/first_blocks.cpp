#include "proof/first_blocks.hpp"

#include "proof/certified.hpp"

#include <Eigen/Cholesky>

#include <cmath>

namespace formsieve::proof {

namespace {

/// Step of the search for a multiple that leaves M − D positive definite.
constexpr double kOffDiagonalStep = 0.6;
constexpr double kSmallestMultiple = 1e-6;
/// The multiple found leads to the edge of the cone; this much of it is used.
constexpr double kInside = 0.95;

/// The off-diagonal parts of the predictors' own blocks of M.
Eigen::MatrixXd off_diagonals(const Reduced& problem) {
  Eigen::MatrixXd result = Eigen::MatrixXd::Zero(problem.m.rows(), problem.m.cols());
  for (const OpenPredictor& predictor : problem.open)
    result.block(predictor.first, predictor.first, predictor.n_columns, predictor.n_columns) =
        problem.m.block(predictor.first, predictor.first, predictor.n_columns, predictor.n_columns);
  // a form's own columns stay together: its D_ff must be positive definite
  for (const OpenPredictor& predictor : problem.open)
    for (const OpenForm& form : predictor.forms)
      result.block(form.first, form.first, form.n_columns, form.n_columns).setZero();
  return result;
}

/// The largest multiple of `blocks` that M allows, to within a few percent; zero when there is none.
double largest_multiple(const Reduced& problem, const Eigen::MatrixXd& blocks, CertifiedDifference& z) {
  constexpr int kBisections = 4;
  double low = 1.0;
  while (low > kSmallestMultiple && !z.certify(problem, low * blocks)) low *= 0.5;
  if (low <= kSmallestMultiple) return 0.0;
  if (low == 1.0) return low;
  double high = 2.0 * low;
  for (int i = 0; i < kBisections; ++i) {
    const double middle = std::sqrt(low * high);
    (z.certify(problem, middle * blocks) ? low : high) = middle;
  }
  return low;
}

/// The Gram of every predictor's forms given all other open columns, times the largest multiple that M allows.
bool conditional_blocks(const Reduced& problem, Eigen::MatrixXd& d) {
  CertifiedDifference z;
  Eigen::MatrixXd blocks = Eigen::MatrixXd::Zero(problem.m.rows(), problem.m.cols());
  if (!z.certify(problem, blocks)) return false;
  const Eigen::MatrixXd inverse = z.inverse();
  for (const OpenPredictor& predictor : problem.open) {
    const Eigen::Index q = predictor.n_columns;
    const Eigen::LLT<Eigen::MatrixXd> own(inverse.block(predictor.first, predictor.first, q, q));
    if (own.info() != Eigen::Success) return false;
    auto block = blocks.block(predictor.first, predictor.first, q, q);
    block = own.solve(Eigen::MatrixXd::Identity(q, q));
    block = (0.5 * (block + block.transpose())).eval();
  }
  d = kInside * largest_multiple(problem, blocks, z) * blocks;
  return d.diagonal().minCoeff() > 0.0 && z.certify(problem, d);
}

/// The freedom inside the predictors' blocks: η times their off-diagonals and ξ times their diagonals.
bool off_diagonal_blocks(const Reduced& problem, Eigen::MatrixXd& d) {
  const Eigen::MatrixXd off = off_diagonals(problem);
  const Eigen::MatrixXd diagonal = problem.m.diagonal().asDiagonal();
  CertifiedDifference z;
  for (double eta = 0.3; eta > 1e-4; eta *= kOffDiagonalStep) {
    for (double xi = 0.1; xi > 1e-3; xi *= 0.5) {
      d = eta * off + xi * diagonal;
      if (z.certify(problem, d)) return true;
    }
  }
  return false;
}

}  // namespace

bool first_blocks(const Reduced& problem, Eigen::MatrixXd& d) {
  if (conditional_blocks(problem, d)) return true;
  return off_diagonal_blocks(problem, d);
}

bool recondition(const Reduced& problem, Eigen::MatrixXd& d) {
  constexpr double kKept = 0.9;
  constexpr int kTrials = 40;
  const Eigen::MatrixXd off = off_diagonals(problem);
  CertifiedDifference z;
  double eta = 0.2;
  for (int trial = 0; trial < kTrials; ++trial, eta *= kOffDiagonalStep) {
    const Eigen::MatrixXd milder = kKept * d + eta * off;
    if (!z.certify(problem, milder)) continue;
    d = milder;
    return true;
  }
  return false;
}

}  // namespace formsieve::proof

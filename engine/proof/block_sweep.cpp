#include "proof/block_sweep.hpp"

#include "proof/first_blocks.hpp"
#include "proof/form_scales.hpp"

#include <Eigen/Cholesky>
#include <Eigen/LU>

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

/// Share of the weights of earlier passes in W; without it two passes may alternate.
constexpr double kOldShare = 0.3;
/// Added to W, in units of λ: keeps it positive definite where forms have no coefficient.
constexpr double kWeightFloor_rel = 0.01;
constexpr double kWeightFloorStep = 2.5;
constexpr int kWeightFloorTrials = 12;
/// A diagonal of D stays above this share of M's.
constexpr double kSmallestDiagonal_rel = 1e-3;
/// Below this ratio of pivots of M − D the updated inverse would lose its digits.
constexpr double kSmallestPivotRatio = 1e-6;

void symmetrise(Eigen::MatrixXd& a) { a = (0.5 * (a + a.transpose())).eval(); }

}  // namespace

Eigen::MatrixXd BlockSweep::weight_of(std::size_t j, const Eigen::VectorXd& v, double lambda,
                                      const FormScales& scales) {
  const OpenPredictor& predictor = problem_->open[j];
  const auto own = v.segment(predictor.first, predictor.n_columns);
  Eigen::MatrixXd w = -own * own.transpose();
  const double total = scales.total_length(j, v);
  for (std::size_t f = 0; f < predictor.forms.size(); ++f) {
    const OpenForm& form = predictor.forms[f];
    const double length = scales.length(j, f, v);
    if (!(length > 0.0)) continue;
    const double root = std::sqrt(lambda * static_cast<double>(form.n_columns));
    const double share = length / (predictor.must ? total : std::max(root, total));
    const auto part = v.segment(form.first, form.n_columns);
    w.block(form.first - predictor.first, form.first - predictor.first, form.n_columns, form.n_columns) +=
        part * part.transpose() / share;
  }
  return w;
}

void BlockSweep::move_block(std::size_t j, double lambda, double mu, Eigen::MatrixXd& d) {
  const OpenPredictor& predictor = problem_->open[j];
  const Eigen::Index first = predictor.first;
  const Eigen::Index q = predictor.n_columns;
  Eigen::MatrixXd own = inverse_.block(first, first, q, q);
  symmetrise(own);
  Eigen::MatrixXd own_inverse = own.llt().solve(Eigen::MatrixXd::Identity(q, q));
  symmetrise(own_inverse);
  const Eigen::VectorXd diagonal = problem_->m.diagonal().segment(first, q);
  Eigen::MatrixXd w;
  Eigen::MatrixXd block;
  double floor = kWeightFloor_rel * lambda;
  bool usable = false;
  for (int trial = 0; trial < kWeightFloorTrials && !usable; ++trial, floor *= kWeightFloorStep) {
    w = weight_[j];
    w.diagonal() += floor * diagonal.cwiseInverse();
    const Eigen::LLT<Eigen::MatrixXd> factor(w);
    if (factor.info() != Eigen::Success) continue;
    block = d.block(first, first, q, q) + own_inverse - mu * factor.solve(Eigen::MatrixXd::Identity(q, q));
    usable = (block.diagonal().array() > kSmallestDiagonal_rel * diagonal.array()).all();
    for (const OpenForm& form : predictor.forms)
      if (usable && form.n_columns > 1)
        usable = block.block(form.first - first, form.first - first, form.n_columns, form.n_columns).llt().info() ==
                 Eigen::Success;
  }
  if (!usable || !block.allFinite()) return;
  symmetrise(block);
  Eigen::MatrixXd core = own_inverse * (w / mu) * own_inverse - own_inverse;
  symmetrise(core);
  const Eigen::MatrixXd columns = inverse_.middleCols(first, q);
  const Eigen::MatrixXd scaled = columns * core;
  inverse_.noalias() += scaled * columns.transpose();
  inverse_.block(first, first, q, q) = w / mu;
  d.block(first, first, q, q) = block;
}

BlockSweep::Outcome BlockSweep::operator()(const Eigen::VectorXd& v, double lambda, double mu, Eigen::MatrixXd& d,
                                           CertifiedDifference& z) {
  Outcome outcome = Outcome::moved;
  const Eigen::MatrixXd before = d;
  const FormScales scales(*problem_, d);
  if (z.pivot_ratio() < kSmallestPivotRatio && recondition(*problem_, d)) {
    outcome = Outcome::reconditioned;
    z.certify(*problem_, d);
  }
  inverse_ = z.inverse();
  for (std::size_t j = 0; j < problem_->open.size(); ++j) {
    Eigen::MatrixXd w = weight_of(j, v, lambda, scales);
    weight_[j] =
        weight_[j].size() == 0 ? std::move(w) : Eigen::MatrixXd(kOldShare * weight_[j] + (1.0 - kOldShare) * w);
    move_block(j, lambda, mu, d);
  }
  if (z.certify(*problem_, d)) return outcome;
  for (const double share : {0.9, 0.7, 0.5, 0.3, 0.1}) {
    const Eigen::MatrixXd blended = share * d + (1.0 - share) * before;
    if (!z.certify(*problem_, blended)) continue;
    d = blended;
    return outcome;
  }
  d = before;
  z.certify(*problem_, d);
  return Outcome::stuck;
}

}  // namespace formsieve::proof

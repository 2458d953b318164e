#include "proof/newton_solve.hpp"

#include <cmath>
#include <cstdlib>

namespace formsieve::proof {

bool Preconditioner::build(const NewtonSystem& system) {
  const Eigen::MatrixXd& a = system.inverse();
  const Eigen::Index n = a.rows();
  const double mu = system.mu();
  blocks_.resize(system.predictors().size());
  core_.setZero(n + 1, n + 1);
  core_.topLeftCorner(n, n) = 2.0 * a;
  const Eigen::Matrix2d& prices = system.price_curvature();
  core_(n, n) = prices(0, 0) - prices(0, 1) * prices(0, 1) / prices(1, 1);
  for (std::size_t j = 0; j < blocks_.size(); ++j) {
    const PredictorTerms& terms = system.predictors()[j];
    const Eigen::Index own = terms.n_entries + 1, q = terms.n_columns;
    Block& block = blocks_[j];
    const auto by_own = terms.jacobian.leftCols(own);
    Eigen::MatrixXd rest(terms.jacobian.rows(), q + 1);
    rest << terms.jacobian.rightCols(q), terms.by_lambda;
    block.lower = mu * by_own.transpose() * by_own;
    block.lower.diagonal().head(terms.n_entries).array() += mu;
    block.lower(own - 1, own - 1) += terms.u_curvature;
    const Eigen::LLT<Eigen::Ref<Eigen::MatrixXd>> cholesky(block.lower);
    if (cholesky.info() != Eigen::Success) return false;
    block.coupling = mu * by_own.transpose() * rest;
    block.lower.triangularView<Eigen::Lower>().solveInPlace(block.coupling);
    const Eigen::MatrixXd schur = mu * rest.transpose() * rest - block.coupling.transpose() * block.coupling;
    core_.block(terms.first, terms.first, q, q) += schur.topLeftCorner(q, q);
    core_.block(n, terms.first, 1, q) += schur.bottomLeftCorner(1, q);
    core_(n, n) += schur(q, q);
  }
  const Eigen::LLT<Eigen::Ref<Eigen::MatrixXd>> cholesky(core_);
  return cholesky.info() == Eigen::Success;
}

void Preconditioner::apply(const NewtonSystem& system, const Eigen::VectorXd& in, Eigen::VectorXd& out) {
  const Eigen::Index n = core_.rows() - 1, lambda = in.size() - 2, s = in.size() - 1;
  const Eigen::Matrix2d& prices = system.price_curvature();
  out = in;
  right_.resize(n + 1);
  right_(n) = in(lambda)-prices(0, 1) / prices(1, 1) * in(s);
  for (std::size_t j = 0; j < blocks_.size(); ++j) {
    const PredictorTerms& terms = system.predictors()[j];
    const Block& block = blocks_[j];
    auto own = out.segment(terms.offset, terms.n_entries + 1);
    block.lower.triangularView<Eigen::Lower>().solveInPlace(own);
    const Eigen::VectorXd less = block.coupling.transpose() * own;
    right_.segment(terms.first, terms.n_columns) = in.segment(terms.w(), terms.n_columns) - less.head(terms.n_columns);
    right_(n) -= less(terms.n_columns);
  }
  core_.triangularView<Eigen::Lower>().solveInPlace(right_);
  core_.triangularView<Eigen::Lower>().transpose().solveInPlace(right_);
  Eigen::VectorXd rest;
  for (std::size_t j = 0; j < blocks_.size(); ++j) {
    const PredictorTerms& terms = system.predictors()[j];
    const Block& block = blocks_[j];
    rest.resize(terms.n_columns + 1);
    rest << right_.segment(terms.first, terms.n_columns), right_(n);
    out.segment(terms.w(), terms.n_columns) = rest.head(terms.n_columns);
    auto own = out.segment(terms.offset, terms.n_entries + 1);
    own -= block.coupling * rest;
    block.lower.triangularView<Eigen::Lower>().transpose().solveInPlace(own);
  }
  out(lambda) = right_(n);
  out(s) = (in(s)-prices(0, 1) * right_(n)) / prices(1, 1);
}

bool ConjugateGradients::solve(NewtonSystem& system, Eigen::VectorXd& solution) {
  constexpr double tol = 0.1;
  constexpr int most = 200;
  n_iterations_ = 0;
  if (!preconditioner_.build(system)) return false;
  residual_ = system.gradient();
  solution.setZero(residual_.size());
  preconditioner_.apply(system, residual_, scaled_);
  along_ = scaled_;
  double energy = residual_.dot(scaled_), gained = 0.0;
  while (n_iterations_ < most) {
    system.multiply(along_, image_);
    const double curvature = along_.dot(image_);
    if (!(curvature > 0.0)) return n_iterations_ > 0 || energy == 0.0;
    const double length = energy / curvature;
    solution += length * along_;
    residual_ -= length * image_;
    ++n_iterations_;
    const double gain = length * energy;
    gained += gain;
    if (n_iterations_ * gain <= tol * gained && n_iterations_ > 1) break;
    preconditioner_.apply(system, residual_, scaled_);
    const double next = residual_.dot(scaled_);
    if (!(next > 0.0)) break;
    along_ = scaled_ + (next / energy) * along_;
    energy = next;
  }
  return std::isfinite(gained);
}

}  // namespace formsieve::proof

#include "proof/newton_solve.hpp"

#include "proof/newton_kernel.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

/// Iterations end when what the preconditioner sees of the residual is this share of the decrement so far.
constexpr double kTolerance_rel = 1e-2;
constexpr int kMostIterations = 150;

/// 2A in the bases of the predictors, lower triangle.
void fill_core(const Lanes& lanes, PaddedMatrix& core) {
  for (std::size_t j = 0; j < lanes.places().size(); ++j)
    for (std::size_t k = 0; k < lanes.places().size(); ++k) {
      const LanePlace& below = lanes.places()[j];
      const LanePlace& right = lanes.places()[k];
      if (right.first > below.first) continue;
      const std::size_t order = lanes.groups()[right.group].n_columns;
      const Line* const block = lanes.block(j, right.group);
      for (std::size_t b = 0; b < right.n_columns; ++b) {
        double* const column = core.column(right.first + b) + below.first;
        for (std::size_t a = 0; a < below.n_columns; ++a) column[a] = 2.0 * block[a * order + b].at[right.lane];
      }
    }
}

}  // namespace

bool Preconditioner::build(NewtonSystem& system) {
  Lanes& lanes = system.lanes();
  std::size_t lambda = 0;
  for (const LanePlace& place : lanes.places()) lambda += place.n_columns;
  core_.reset(lambda + 1);
  right_.resize(core_.padded_order() / kLineLanes);
  rest_.resize(lanes.n_lines() + lanes.groups().size());
  fill_core(lanes, core_);
  const Eigen::Matrix2d& prices = system.price_curvature();
  core_.column(lambda)[lambda] = prices(0, 0) - prices(0, 1) * prices(0, 1) / prices(1, 1);
  for (LaneGroup& group : lanes.groups()) {
    if (!eliminate_own(group, system.mu())) return false;
    add_group(lanes, group);
  }
  return factor_lower(core_);
}

/// Adds the predictors' own parts for w and λ.
void Preconditioner::add_group(const Lanes& lanes, const LaneGroup& group) {
  const std::size_t lambda = core_.order() - 1, q = group.n_columns;
  for (std::size_t lane = 0; lane < group.n_predictors; ++lane) {
    const LanePlace& place = lanes.places()[group.predictor[lane]];
    const auto at = [&](std::size_t i, std::size_t k) { return group.schur[lower_index(i, k)].at[lane]; };
    for (std::size_t k = 0; k < place.n_columns; ++k) {
      double* const column = core_.column(place.first + k);
      for (std::size_t i = k; i < place.n_columns; ++i) column[place.first + i] += at(i, k);
      column[lambda] += at(q, k);
    }
    core_.column(lambda)[lambda] += at(q, q);
  }
}

void Preconditioner::apply(const NewtonSystem& system, const Lines& in, Lines& out) {
  const Lanes& lanes = system.lanes();
  const Eigen::Matrix2d& prices = system.price_curvature();
  const std::size_t lambda = core_.order() - 1;
  double* const right = right_.data()->at;
  std::fill(right + lambda, right + core_.padded_order(), 0.0);
  right[lambda] = in.back().at[kLambdaLane] - prices(0, 1) / prices(1, 1) * in.back().at[kSLane];
  for (const LaneGroup& group : lanes.groups()) {
    forward_own(group, in.data() + group.first, out.data() + group.first, rest_.data());
    for (std::size_t lane = 0; lane < group.n_predictors; ++lane) {
      const LanePlace& place = lanes.places()[group.predictor[lane]];
      for (std::size_t i = 0; i < place.n_columns; ++i)
        right[place.first + i] = in[group.w_line() + i].at[lane] - rest_[i].at[lane];
      right[lambda] -= rest_[group.n_columns].at[lane];
    }
  }
  solve_lower(core_, right);
  solve_transposed(core_, right);
  for (const LaneGroup& group : lanes.groups()) {
    for (std::size_t lane = 0; lane < group.n_predictors; ++lane) {
      const LanePlace& place = lanes.places()[group.predictor[lane]];
      for (std::size_t i = 0; i < place.n_columns; ++i)
        rest_[i].at[lane] = out[group.w_line() + i].at[lane] = right[place.first + i];
      for (std::size_t i = place.n_columns; i < group.n_columns; ++i) rest_[i].at[lane] = 0.0;
      rest_[group.n_columns].at[lane] = right[lambda];
    }
    backward_own(group, rest_.data(), out.data() + group.first);
  }
  out.back() = Line();
  out.back().at[kLambdaLane] = right[lambda];
  out.back().at[kSLane] = (in.back().at[kSLane] - prices(0, 1) * right[lambda]) / prices(1, 1);
}

ConjugateGradients::ConjugateGradients(const NewtonSystem& system) {
  for (Lines* lines : {&solution_, &residual_, &scaled_, &along_, &image_}) lines->resize(system.lanes().n_lines());
}

bool ConjugateGradients::solve(NewtonSystem& system) {
  n_iterations_ = 0;
  decrement_ = 0.0;
  if (!preconditioner_.build(system)) return false;
  residual_ = system.gradient();
  std::fill(solution_.begin(), solution_.end(), Line());
  preconditioner_.apply(system, residual_, scaled_);
  along_ = scaled_;
  double energy = dot(residual_, scaled_);
  while (n_iterations_ < kMostIterations && energy > kTolerance_rel * decrement_) {
    system.multiply(along_, image_);
    const double curvature = dot(along_, image_);
    if (!(curvature > 0.0)) break;
    const double length = energy / curvature;
    add_multiple(along_, length, solution_);
    add_multiple(image_, -length, residual_);
    ++n_iterations_;
    decrement_ += length * energy;
    preconditioner_.apply(system, residual_, scaled_);
    const double next = dot(residual_, scaled_);
    add_multiple(along_, next / energy, scaled_);  // the next direction
    std::swap(along_, scaled_);
    energy = next;
  }
  return n_iterations_ > 0 && std::isfinite(decrement_);
}

}  // namespace formsieve::proof

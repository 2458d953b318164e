#include "proof/newton.hpp"

#include "proof/newton_barrier.hpp"
#include "proof/newton_solve.hpp"
#include "proof/newton_system.hpp"

#include <Eigen/Core>

#include <cmath>
#include <utility>
#include <vector>

namespace formsieve::proof {

namespace {

constexpr double kShortestStep = 1e-6;
/// Share of the increase that the slope promises which a step must reach.
constexpr double kPromised = 0.05;
/// Shortening: gently near the full step, then faster.
constexpr double kGently = 0.75, kFaster = 0.6;
/// Above this decrement (over μ) an acceptable step is shortened while that still helps: otherwise iterates run into
/// the boundary of M − D ≻ 0.
constexpr double kFarFromCentre = 4.0;
constexpr int kMostShortenings = 6;
/// Such a step also goes no further than a share of a length at which the point is still inside the domain, the smaller
/// one above a yet larger decrement: a step that almost reaches the boundary may leave M − D with one eigenvalue orders
/// of magnitude below the others, from which the method comes back only at a crawl (newton_test: steps do not run into
/// the boundary).
constexpr double kReach = 0.8, kFarReach = 0.6;
constexpr double kFarther = 100.0;

}  // namespace

struct Newton::State {
  State(const Reduced& to_solve, const ColumnRange& range, const DualPoint& start)
      : problem(&to_solve), prices(to_solve, range, start.lambda), system(to_solve), solver(system), mu(start.mu) {
    at.d.setZero(to_solve.m.rows(), to_solve.m.cols());
    for (const OpenPredictor& predictor : to_solve.open) {
      const Eigen::Index i = predictor.first, n = predictor.n_columns;
      at.d.block(i, i, n, n) = start.d.block(i, i, n, n);
    }
    at.g = start.g;
    at.u.setZero(static_cast<Eigen::Index>(to_solve.open.size()));
    at.lambda = start.lambda;
    trial = kept = direction = at;
    inside = mu > 0.0 && centre(to_solve, prices, mu, at) && evaluate_here();
  }

  bool evaluate_here() {
    value = merit(*problem, prices, mu, at, factor);
    return std::isfinite(value);
  }

  /// The merit at `length` along the direction; leaves point and factor in `trial` and `trial_factor`.
  double try_length(double length) {
    trial.set_along(at, length, direction, *problem);
    return merit(*problem, prices, mu, trial, trial_factor);
  }

  /// What was tried last becomes the best so far.
  void keep() {
    std::swap(kept, trial);
    std::swap(kept_factor, trial_factor);
  }

  void accept(double kept_value) {
    std::swap(at, kept);
    std::swap(factor, kept_factor);
    value = kept_value;
  }

  double longest(double decrement);
  double search(double decrement);

  const Reduced* problem;
  Prices prices;
  NewtonSystem system;
  ConjugateGradients solver;
  Variables at, trial, kept, direction;
  Factor factor, trial_factor, kept_factor;
  double mu, value = 0.0;
  bool inside = false;  ///< the point lies in the domain, `factor` and `value` are its own
};

/// The length to begin with.
double Newton::State::longest(double decrement) {
  if (decrement <= kFarFromCentre * mu) return 1.0;
  const double reach = decrement > kFarther * mu ? kFarReach : kReach;
  double inside_at = 1.0 / reach;
  while (!std::isfinite(try_length(inside_at)) && inside_at > kShortestStep) inside_at *= kGently;
  return reach * inside_at;
}

/// Moves along the direction, by a length that is returned, or not at all: 0.
double Newton::State::search(double decrement) {
  double length = longest(decrement), reached = try_length(length);
  while (!(reached >= value + kPromised * length * decrement)) {
    length *= length > 0.5 ? kGently : kFaster;
    if (length <= kShortestStep) return 0.0;
    reached = try_length(length);
  }
  keep();
  if (decrement > kFarFromCentre * mu)
    for (int i = 0; i < kMostShortenings; ++i) {
      const double shorter = try_length(length * kFaster);
      if (!(shorter > reached)) break;
      keep();
      length *= kFaster;
      reached = shorter;
    }
  accept(reached);
  return length;
}

Newton::Newton(const Reduced& problem, const ColumnRange& range, const DualPoint& start)
    : state_(std::make_unique<State>(problem, range, start)) {}
Newton::~Newton() = default;
Newton::Newton(Newton&&) noexcept = default;

Newton::Step Newton::step() {
  State& state = *state_;
  Step step;
  if (!state.inside || !state.system.build(state.at, state.factor, state.prices, state.mu)) return step;
  if (!state.solver.solve(state.system)) return step;
  step.iterations = state.solver.n_iterations();
  const double decrement = state.solver.decrement();
  if (!(decrement >= 0.0)) return step;  // NaN too
  state.system.expand(state.solver.solution(), state.direction);
  step.length = state.search(decrement);
  step.usable = step.length > 0.0;
  step.decrement = decrement / state.mu;
  return step;
}

void Newton::set_mu(double mu) {
  state_->mu = mu;
  if (state_->inside) state_->inside = mu > 0.0 && state_->evaluate_here();
}

double Newton::mu() const { return state_->mu; }

DualPoint Newton::point() const {
  const State& state = *state_;
  DualPoint point{state.at.d, state.at.g, {}, state.at.lambda, state.mu};
  if (!state.inside) return point;
  std::vector<Line> v = state.factor.residual;
  solve_transposed(state.factor.lower, v.data()->at);
  point.v = Eigen::Map<const Eigen::VectorXd>(v.data()->at, state.at.g.size());
  return point;
}

std::size_t Newton::n_variables(const Reduced& problem) {
  std::size_t n = 2;
  for (const OpenPredictor& predictor : problem.open) {
    const auto q = static_cast<std::size_t>(predictor.n_columns);
    n += q * (q + 1) / 2 + q + 1;
  }
  return n;
}

}  // namespace formsieve::proof

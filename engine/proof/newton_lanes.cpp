#include "proof/newton_lanes.hpp"

#include <algorithm>
#include <numeric>

namespace formsieve::proof {

namespace {

std::size_t barrier_rows(const OpenPredictor& predictor) {
  std::size_t n = 0;
  for (const OpenForm& form : predictor.forms) {
    const auto order = static_cast<std::size_t>(form.n_columns) + 1;
    n += order * (order + 1) / 2;
  }
  return n;
}

void allocate(LaneGroup& group) {
  const std::size_t q = group.n_columns, own = group.n_own();
  group.jacobian.resize(group.n_rows * group.n_variables());
  group.by_lambda.resize(group.n_rows);
  group.basis.resize(q * q);
  for (double& lane : group.u_curvature.at) lane = 1.0;
  group.own.resize(own * (own + 1) / 2);
  group.coupling.resize(own * (q + 1));
  group.schur.resize((q + 1) * (q + 2) / 2);
}

}  // namespace

Lanes::Lanes(const Reduced& problem) : places_(problem.open.size()) {
  make_groups(problem);
  for (LaneGroup& group : groups_) {
    group.first = n_lines_;
    n_lines_ += group.n_variables();
    allocate(group);
    if (classes_.empty() || classes_.back().n_columns != group.n_columns)
      classes_.push_back({static_cast<std::size_t>(&group - groups_.data()), 0, group.n_columns});
    ++classes_.back().n_groups;
  }
  ++n_lines_;
  place_blocks();
}

void Lanes::make_groups(const Reduced& problem) {
  std::vector<std::size_t> order(problem.open.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t i, std::size_t j) { return problem.open[i].n_columns > problem.open[j].n_columns; });
  for (const std::size_t j : order) {
    const OpenPredictor& predictor = problem.open[j];
    if (groups_.empty() || groups_.back().n_predictors == kLineLanes) groups_.emplace_back();
    LaneGroup& group = groups_.back();
    places_[j] = {groups_.size() - 1, group.n_predictors, static_cast<std::size_t>(predictor.first),
                  static_cast<std::size_t>(predictor.n_columns), 0};
    group.predictor[group.n_predictors++] = j;
    group.n_columns = std::max(group.n_columns, places_[j].n_columns);
    group.n_rows = std::max(group.n_rows, barrier_rows(predictor));
  }
}

void Lanes::place_blocks() {
  std::size_t columns = 0;
  for (const LaneGroup& group : groups_) {
    columns_before_.push_back(columns);
    columns += group.n_columns;
  }
  std::size_t line = 0;
  for (LanePlace& place : places_) {
    place.block_line = line;
    line += place.n_columns * columns;
  }
  blocks_.resize(line);
}

}  // namespace formsieve::proof

#include "proof/node.hpp"

namespace formsieve::proof {

Inherited pack(const Reduced& problem, const DualPoint& point, const Eigen::VectorXd& v) {
  Inherited inherited{problem.open, {}, v, point.g, point.lambda, point.mu};
  for (const OpenPredictor& predictor : problem.open)
    inherited.blocks.emplace_back(
        point.d.block(predictor.first, predictor.first, predictor.n_columns, predictor.n_columns));
  return inherited;
}

namespace {

/// Columns of `to` and where they stood in `from`, within the predictor's block.
std::vector<std::pair<Eigen::Index, Eigen::Index>> matches(const OpenPredictor& from, const OpenPredictor& to) {
  std::vector<std::pair<Eigen::Index, Eigen::Index>> result;
  std::size_t f = 0;
  for (const OpenForm& form : to.forms) {
    while (f < from.forms.size() && from.forms[f].form < form.form) ++f;
    if (f == from.forms.size() || from.forms[f].form != form.form) continue;
    for (Eigen::Index c = 0; c < form.n_columns; ++c)
      result.emplace_back(from.forms[f].first - from.first + c, form.first - to.first + c);
  }
  return result;
}

}  // namespace

DualPoint unpack(const Inherited& inherited, const Reduced& problem) {
  const Eigen::Index order = problem.m.rows();
  DualPoint point{Eigen::MatrixXd::Zero(order, order), Eigen::VectorXd(), Eigen::VectorXd::Zero(order),
                  inherited.lambda, inherited.mu};
  const bool with_g = inherited.g.size() > 0;
  if (with_g) point.g.setZero(order);
  std::size_t p = 0;
  for (const OpenPredictor& to : problem.open) {
    while (p < inherited.open.size() && inherited.open[p].predictor < to.predictor) ++p;
    if (p == inherited.open.size()) break;
    const OpenPredictor& from = inherited.open[p];
    if (from.predictor != to.predictor) continue;
    const auto pairs = matches(from, to);
    for (const auto& [a, i] : pairs) {
      point.v(to.first + i) = inherited.v(from.first + a);
      if (with_g) point.g(to.first + i) = inherited.g(from.first + a);
      for (const auto& [b, j] : pairs) point.d(to.first + i, to.first + j) = inherited.blocks[p](a, b);
    }
  }
  return point;
}

Node root_node(const Scope& scope, std::size_t response) {
  Node node;
  node.response = response;
  node.most_columns = scope.most_columns;
  node.actions = scope.actions;
  return node;
}

Certificate::Part part_of(const Node& node) {
  return {node.number, node.response, node.actions, node.fewest_columns, node.most_columns};
}

}  // namespace formsieve::proof

#include "proof/starting_point.hpp"

#include "proof/first_blocks.hpp"

#include <Eigen/Cholesky>

namespace formsieve::proof {

namespace {

/// Coefficients of the given columns alone.
void fit_columns(const Reduced& problem, const std::vector<Eigen::Index>& columns, Eigen::VectorXd& v) {
  if (columns.empty()) return;
  const Eigen::LLT<Eigen::MatrixXd> factor(problem.m(columns, columns));
  if (factor.info() != Eigen::Success) return;
  v(columns) = Eigen::VectorXd(factor.solve(Eigen::VectorXd(problem.b(columns))));
}

/// The coefficients of the best candidate.
void fit_best(const Frozen& frozen, const Reduced& problem, Eigen::VectorXd& v) {
  v.setZero(problem.b.size());
  if (frozen.best_choice.empty()) return;
  std::vector<Eigen::Index> columns;
  for (const OpenPredictor& predictor : problem.open)
    for (const OpenForm& form : predictor.forms)
      if (frozen.best_choice[predictor.predictor] == form.form + 1)
        for (Eigen::Index c = 0; c < form.n_columns; ++c) columns.push_back(form.first + c);
  fit_columns(problem, columns, v);
}

}  // namespace

bool shrink_until_certified(const Reduced& problem, Eigen::MatrixXd& d, CertifiedDifference& z) {
  constexpr int kTrials = 60;
  constexpr double kShrink = 0.9;
  for (int trial = 0; trial < kTrials; ++trial, d *= kShrink)
    if (z.certify(problem, d)) return true;
  return false;
}

bool starting_point(const Frozen& frozen, const Reduced& problem, const Node& node, const ColumnPrice& price,
                    DualPoint& point, CertifiedDifference& z, double& work) {
  const auto order = static_cast<double>(problem.m.rows());
  work += order * order * order;
  if (node.inherited) {
    point = unpack(*node.inherited, problem);
    point.lambda = price.within(node.new_range ? 0.0 : point.lambda, node.fewest_columns, node.most_columns);
    if (shrink_until_certified(problem, point.d, z)) return true;
  } else {
    point.lambda = price.at_best();
    fit_best(frozen, problem, point.v);
  }
  work += 5.0 * order * order * order;
  point.g.resize(0);
  point.mu = 0.0;
  return first_blocks(problem, point.d) && z.certify(problem, point.d);
}

}  // namespace formsieve::proof

#include "checks/leave_out.hpp"

#include <cmath>

namespace formsieve::checks {

namespace {

/// √w e/((1 − h)·σ): the residual of the row from the fit without it, in residual standard deviations.
double pull_of(const Workings& workings, Eigen::Index row) {
  return workings.residuals[row] / workings.subject.sigma / (1.0 - workings.subject.leverage[row]);
}

}  // namespace

double largest_prediction_change(const Workings& workings, Eigen::Index row) {
  if (workings.subject.leverage[row] >= kFullLeverage) return 0.0;
  const Eigen::MatrixXd& q = workings.of_the_fit().q;
  const Eigen::VectorXd hat = q * q.row(row).transpose();
  return hat.lpNorm<Eigen::Infinity>() * std::abs(pull_of(workings, row));
}

Eigen::MatrixXd inverse_root(const Workings& workings) {
  const Basis& basis = workings.of_the_fit();
  const Eigen::Index k = workings.p - 1;
  Eigen::MatrixXd root = Eigen::MatrixXd::Zero(workings.p, workings.p);
  root(0, 0) = 1.0 / basis.intercept_length;
  if (k == 0) return root;
  const Eigen::MatrixXd inverse = basis.r.triangularView<Eigen::Upper>().solve(Eigen::MatrixXd::Identity(k, k));
  root.bottomRightCorner(k, k) = basis.length.cwiseInverse().asDiagonal() * inverse;
  root.block(0, 1, 1, k) = -basis.centre.transpose() * root.bottomRightCorner(k, k);
  return root;
}

Eigen::VectorXd coefficient_moves_se(const Workings& workings, const Eigen::MatrixXd& inverse_root, Eigen::Index row) {
  if (workings.subject.leverage[row] >= kFullLeverage) return Eigen::VectorXd::Zero(workings.p);
  const Eigen::VectorXd direction = inverse_root * workings.of_the_fit().q.row(row).transpose();
  return -pull_of(workings, row) * direction.cwiseQuotient(inverse_root.rowwise().norm());
}

}  // namespace formsieve::checks

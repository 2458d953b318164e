#include "checks/no_single_row.hpp"

#include "checks/words.hpp"
#include "checks/workings.hpp"

#include <cmath>

namespace formsieve::checks {

namespace {

/// Largest change, over all rows j, of the fitted value of row j when `row` is left out, in the standard deviation
/// σ/√w_j of a measurement at row j: |q_j·q_row|·√w|e|/((1 − h)·σ) with q the rows of an orthonormal basis of the
/// whitened design. DFFITS (Belsley, Kuh & Welsch 1980) is the same at j = row, but for its own scale.
double largest_prediction_change(const Workings& workings, Eigen::Index row) {
  const Subject& subject = workings.subject;
  if (subject.leverage[row] >= kFullLeverage) return 0.0;
  const Eigen::MatrixXd& q = workings.of_the_fit().q;
  const Eigen::VectorXd hat = q * q.row(row).transpose();
  const double pull = std::abs(workings.residuals[row]) / subject.sigma / (1.0 - subject.leverage[row]);
  return hat.lpNorm<Eigen::Infinity>() * pull;
}

void note_full_leverage(const Workings& workings, Check& check) {
  Eigen::Index row = 0;
  if (workings.subject.leverage.maxCoeff(&row) < kFullLeverage) return;
  check.passes = false;
  check.note = row_words(static_cast<long>(row)) + " has leverage 1: a coefficient rests on it alone";
}

}  // namespace

Eigen::VectorXd cook_distances(const Subject& subject) {
  const Eigen::ArrayXd h = subject.leverage.array();
  Eigen::ArrayXd scaled = subject.residuals.array() / subject.sigma;
  if (subject.weights.size() > 0) scaled *= subject.weights.array().sqrt();
  const double p = static_cast<double>(subject.x.cols());
  return (h < kFullLeverage).select(scaled.square() * h / (p * (1.0 - h).square()), 0.0);
}

Check no_single_row(const Workings& workings) {
  Check check =
      named("no-single-row", "largest distance of Cook", "no single row decides the equation (a limit of 1, no test)");
  check.size_words = "no residuals to judge";
  const Subject& subject = workings.subject;
  if (!workings.untestable.empty()) {
    check.note = workings.untestable;
    return check;
  }
  if (!(subject.sigma > 0.0) || !subject.leverage.allFinite() || !workings.of_the_fit().full_rank) {
    check.note = "the fit has no residual spread or no leverages";
    return check;
  }
  Eigen::Index row = 0;
  const double largest = cook_distances(subject).maxCoeff(&row);
  check.statistic = largest;
  check.size = largest_prediction_change(workings, row);
  check.size_words = "leaving out " + row_words(static_cast<long>(row)) + " moves a prediction by up to " +
                     number_words(check.size) + " residual standard deviations";
  check.passes = largest <= kMostCookDistance;
  note_full_leverage(workings, check);
  return check;
}

}  // namespace formsieve::checks

#include "pipeline/fitted_rows.hpp"

#include <cmath>
#include <limits>

namespace formsieve::pipeline {

using Eigen::Index;

Result<TrainingPart> training_part(const FittedRows& rows, std::span<const std::uint32_t> fold_of,
                                   const fit::FoldedFit& folded, std::size_t fold) {
  const auto solution = folded.without(fold);
  if (!solution) return solution.error();
  const auto root = folded.inverse_root_without(fold);
  if (!root) return root.error();
  TrainingPart part;
  std::vector<Index> training;
  for (std::size_t i = 0; i < fold_of.size(); ++i)
    (fold_of[i] == fold ? part.held_out : training).push_back(static_cast<Index>(i));
  const Eigen::VectorXd eta = rows.x * solution->coefficients;
  part.fitted = eta(training);
  part.residuals = rows.z(training) - part.fitted;
  if (rows.weights.size() > 0) part.weights = rows.weights(training);
  const Eigen::Map<const Eigen::VectorXd> measured(rows.measured_own.data(), eta.size());
  part.measured_own = measured(training);
  part.df = static_cast<double>(training.size()) - static_cast<double>(rows.x.cols());
  part.sigma = part.df > 0.0 ? std::sqrt(solution->rss / part.df) : std::numeric_limits<double>::quiet_NaN();
  part.eta = eta(part.held_out);
  part.leverage = (rows.x(part.held_out, Eigen::all) * *root).rowwise().squaredNorm();
  return part;
}

}  // namespace formsieve::pipeline

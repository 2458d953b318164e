// A fit that a few rows cannot move, as a cross-check on least squares.
#pragma once

#include "fit/least_squares.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <string>

namespace formsieve::fit {

struct RobustFit {
  Eigen::VectorXd coefficients;    ///< [p] in the order and units of the design
  Eigen::VectorXd weight_rel;      ///< [n] 0 … 1: what is left of each row's weight
  double scale = 0.0;              ///< spread of the (whitened) residuals, consistent at the normal distribution
  std::size_t n_downweighted = 0;  ///< rows with less than half of their weight
  std::string method;              ///< "MM, bisquare", or "M, Huber" where the first failed
};

/// MM estimate (Yohai 1987): coefficients and scale from an S estimate of breakdown ½ (bisquare, tuning 1.54764), then
/// the bisquare M estimate of 95 % efficiency (tuning 4.685) from there with that scale held. The S estimate is found
/// by fast-S (Salibian-Barrera & Yohai 2006) with a fixed seed: candidates through p rows each and from least squares,
/// compared on at most 500 rows, the best refined on at most 20,000; scale and M estimate are of all rows. Where more
/// than half of the rows lie on one equation exactly, or no candidate is found, the Huber M estimate (tuning 1.345,
/// scale by the median absolute residual; Huber 1964) stands in.
///
/// `plain` is the least-squares fit of the same `x` [n × p], intercept first, and `weights` (or size 0); residuals are
/// taken times √w. Errors (kind data): no residual degrees of freedom, an exact fit, more than half of the residuals
/// zero, not finite. Cost O(n p²) for the QR and each of about eight Newton steps, and up to 300 candidates of
/// O(500 p²); the same bits for any number of threads.
Result<RobustFit> robust_fit(const Eigen::Ref<const Eigen::MatrixXd>& x,
                             const Eigen::Ref<const Eigen::VectorXd>& weights, const Fit& plain);

}  // namespace formsieve::fit

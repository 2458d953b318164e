// Condition indices of a design and what of each coefficient's variance belongs to them.
#pragma once

#include "checks/workings.hpp"

#include <Eigen/Core>

#include <vector>

namespace formsieve::checks {

/// Belsley, Kuh & Welsch 1980, chapter 3: singular values μ of the (√w-whitened) design with its intercept, every
/// column scaled to unit length and not centred.
struct Condition {
  Eigen::VectorXd index;       ///< [p] μ_max/μ_k, rising; the last is the condition number
  Eigen::MatrixXd proportion;  ///< [p × p] of the variance of coefficient j (row) that goes with index k (column)
};

/// `basis` of the design, full rank. Cost O(p³).
Condition condition(const Basis& basis);

/// Design columns, the intercept left out, that share a near dependency: at least two of them with more than half of
/// their variance in one index beyond 30 (the authors' rule for a harmful dependency, section 3.3). Empty where there
/// is none.
std::vector<Eigen::Index> entangled_columns(const Condition& condition);

}  // namespace formsieve::checks

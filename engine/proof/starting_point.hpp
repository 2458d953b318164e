// Where the work on the bound of a node begins.
#pragma once

#include "proof/certified.hpp"
#include "proof/column_price.hpp"
#include "proof/dual.hpp"
#include "proof/node_work.hpp"

namespace formsieve::proof {

/// D is inherited and valid but for rounding: makes it a little less until it is provably so.
bool shrink_until_certified(const Reduced& problem, Eigen::MatrixXd& d, CertifiedDifference& z);

/// Fills d, v and lambda, and of an inherited point g and mu too (else g empty and mu zero); `z` is certified for d.
/// The v of a root is that of the best candidate. False where no D was found.
bool starting_point(const Frozen& frozen, const Reduced& problem, const Node& node, const ColumnPrice& price,
                    DualPoint& point, CertifiedDifference& z, double& work);

}  // namespace formsieve::proof

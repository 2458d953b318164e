// The Newton system of the dual in its own variables, entry by entry from the definitions: the oracle of
// engine/proof/newton_system.cpp, and what it is compared with for speed.
#pragma once

#include "proof/newton_barrier.hpp"

#include <Eigen/Core>

namespace formsieve::test {

/// Variables: for each predictor the lower triangle of D_jj by columns, g_j, u_j; then λ and s.
struct PlainSystem {
  Eigen::VectorXd gradient;
  Eigen::MatrixXd hessian;  ///< of minus the merit; the lower triangle
};

PlainSystem plain_system(const proof::Reduced& node, const proof::Prices& prices, double mu,
                         const proof::Variables& at);

}  // namespace formsieve::test

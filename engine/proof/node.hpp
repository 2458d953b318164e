// A node of the tree: a response form, what every predictor may still do, and how many columns.
#pragma once

#include "proof/certificate.hpp"
#include "proof/dual.hpp"
#include "proof/problem.hpp"
#include "proof/reduced.hpp"
#include "proof/scope.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <limits>
#include <memory>
#include <vector>

namespace formsieve::proof {

/// A point of the dual as children inherit it: fixing or striking a form leaves the rest of D valid, since a Schur
/// complement of M − D + D_ff and a principal block of a positive semidefinite matrix are positive semidefinite. Blocks
/// by open predictor of the node that found it.
struct Inherited {
  std::vector<OpenPredictor> open;
  std::vector<Eigen::MatrixXd> blocks;
  Eigen::VectorXd v;  ///< where coordinate descent ended
  Eigen::VectorXd g;  ///< of Newton's method; empty after sweeps alone
  double lambda = 0.0, mu = 0.0;
};

Inherited pack(const Reduced& problem, const DualPoint& point, const Eigen::VectorXd& v);
/// The same for a problem with fewer forms; columns that were not there get zero.
DualPoint unpack(const Inherited& inherited, const Reduced& problem);

struct Node {
  double lower = -std::numeric_limits<double>::infinity();  ///< bound on the scores of its candidates
  std::uint64_t number = 0;                                 ///< in order of creation: settles ties
  std::size_t response = 0;
  std::size_t depth = 0;
  std::size_t fewest_columns = 0, most_columns = 0;  ///< all counted
  std::vector<Actions> actions;                      ///< [n_predictors]
  std::shared_ptr<const Inherited> inherited;        ///< null at a root
  bool new_range = false;                            ///< the range of columns was just cut: λ starts anew
};

/// All candidates of a scope with this response form.
Node root_node(const Scope& scope, std::size_t response);

Certificate::Part part_of(const Node& node);

}  // namespace formsieve::proof

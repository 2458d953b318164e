// The bound of a node made as good as is worth while.
#pragma once

#include "proof/node_work.hpp"

namespace formsieve::proof {

/// How a node stands after its bound was improved.
enum class Standing {
  cut,      ///< no candidate of it lies under the threshold
  changed,  ///< actions were struck off: it is a smaller problem now
  open,     ///< to be branched on
  expired,  ///< time ran out
};

struct Refined {
  Standing standing = Standing::open;
  Bound bound;  ///< the best; empty `action` where there was no D
};

/// Improves the bound of `node`; narrows its actions and its range of columns, raises `lower`, and leaves in it what
/// the children inherit.
Refined refine_by_sweeps(const Frozen& frozen, const Reduced& problem, Node& node, Account& account);
/// The same by Newton's method: dearer, but it reaches the optimum of the dual, where sweeps may stall.
Refined refine_by_newton(const Frozen& frozen, const Reduced& problem, Node& node, Account& account);

/// Narrows a node by the bound at (d, v). What is decided stays valid whatever comes after.
struct Narrowed {
  bool cut = false;
  std::size_t n_struck = 0;  ///< actions
};
Narrowed narrow(const Frozen& frozen, const Reduced& problem, const Bound& bound, const Eigen::MatrixXd& d,
                const Eigen::VectorXd& v, Node& node, Account& account);

CountRange range_of(const Frozen& frozen, const Node& node);

}  // namespace formsieve::proof

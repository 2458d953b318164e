// A proof written down: enough to check it without the code that found it.
#pragma once

#include "proof/problem.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::proof {

/// The tree of a proof. A node's candidates are those of its response form whose choices are among its actions, whose
/// number of design columns is in its range and whose number of terms is in the restriction's. Everything is relative
/// to RootGram: columns and responses of unit length.
struct Certificate {
  struct Part {
    std::uint64_t number = 0;
    std::size_t response = 0;
    std::vector<Actions> actions;  ///< [n_predictors]
    std::size_t fewest_columns = 0, most_columns = 0;
  };

  enum class Reason {
    counting,     ///< no candidate has this action and a number of terms and columns in range
    inseparable,  ///< some pivot is too small in every candidate with this action; nothing left: in every candidate
    bound,        ///< the bound at (d, v) lies above the final threshold
  };
  /// What was taken away: actions and numbers of columns.
  struct Step {
    Reason reason = Reason::counting;
    Part before, after;
    bool nothing_left = false;
    /// What d and v are of: a problem that holds the part before. Its open columns are those of the forms of all
    /// predictors with more than one action here, in plan order and rising; the columns of the predictors with one
    /// action are projected out.
    std::vector<Actions> problem;
    Eigen::MatrixXd d;
    Eigen::VectorXd v;
  };

  enum class End {
    nothing_left,  ///< by its last step
    enumerated,    ///< every candidate was scored
    branched,      ///< the children cover it
    open,          ///< not proved
  };
  struct Node {
    Part part;
    std::vector<Step> steps;  ///< each begins where the last ended
    End end = End::open;
    std::vector<Part> children;
  };

  std::vector<Part> roots;
  /// In the order in which they were worked on. A root or child that is not here was cut by the bound of a step of one
  /// of its ancestors.
  std::vector<Node> nodes;
};

}  // namespace formsieve::proof

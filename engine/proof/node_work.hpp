// What is done at one node of the tree: bound, strike off, enumerate or branch.
#pragma once

#include "proof/bound.hpp"
#include "proof/certificate.hpp"
#include "proof/enumerate.hpp"
#include "proof/node.hpp"
#include "proof/scope.hpp"

#include <cstddef>
#include <functional>
#include <optional>
#include <vector>

namespace formsieve::proof {

/// What the work on a node goes by; the same for all nodes of a batch.
struct Frozen {
  const RootGram* root = nullptr;
  const Scope* scope = nullptr;
  Effort effort;
  bool record = false;                                          ///< write certificates
  bool newton = false;                                          ///< Newton's method instead of sweeps
  double threshold = std::numeric_limits<double>::infinity();   ///< scores above it need no proof of their own
  double best_score = std::numeric_limits<double>::infinity();  ///< infinite when nothing is listed
  std::size_t best_columns = 0;
  std::vector<std::uint16_t> best_choice;  ///< empty when nothing is listed
  std::function<bool()> expired;           ///< may be empty
};

struct NodeResult {
  std::vector<Found> found;                 ///< enumerated candidates at or below the threshold
  std::vector<search::Choice> rounded;      ///< candidates that the bounds suggest, not scored
  std::vector<Node> children;               ///< cover what is left of the node
  std::optional<Node> root;                 ///< of a root that was branched on: what was left of it, nothing inherited
  std::optional<Node> unfinished;           ///< time ran out: the node as far as it came
  std::optional<Certificate::Node> record;  ///< where it is asked for
  double work = 0.0;
};

/// What the work on one node adds up to.
struct Account {
  double work = 0.0;                      ///< about how many floating-point operations
  std::vector<Certificate::Step>* steps;  ///< null: not recorded
};

NodeResult work_on(const Frozen& frozen, Node node);

}  // namespace formsieve::proof

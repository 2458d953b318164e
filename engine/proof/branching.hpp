// A node cut into children by the actions of one predictor.
#pragma once

#include "proof/bound.hpp"
#include "proof/node.hpp"
#include "proof/reduced.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::proof {

/// Without a bound: the open predictor with the form that lowers the RSS most.
std::size_t strongest_predictor(const Reduced& problem);

/// One child for each action that the node leaves open predictor j, in the order of the actions; none begins below the
/// bound of its action. `bound` may be without actions.
std::vector<Node> children_of(const Reduced& problem, const Node& node, std::size_t j, const Bound& bound);

}  // namespace formsieve::proof

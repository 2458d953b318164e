// What numbers of terms and columns alone decide.
#pragma once

#include "proof/node.hpp"
#include "proof/scope.hpp"

namespace formsieve::proof {

/// Takes away actions that the range of columns or terms rules out and tightens the node's range of columns. False:
/// the node has no candidate.
bool settle(const RootGram& root, const Scope& scope, Node& node);

}  // namespace formsieve::proof

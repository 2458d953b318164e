// Which candidates a proof speaks of, and how it goes about it.
#pragma once

#include "proof/problem.hpp"
#include "proof/prove.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::proof {

/// The candidates of a restriction.
struct Scope {
  std::vector<std::size_t> responses;
  std::vector<Actions> actions;  ///< [n_predictors]
  std::size_t fewest_terms = 0, most_terms = 0;
  std::size_t most_columns = 0;  ///< the last with a finite penalty

  bool contains(std::size_t response, std::span<const std::uint16_t> choice) const;
};

Scope scope_of(const RootGram& root, const Restriction& restriction);

/// How nodes are worked on. What is proved does not depend on it; tests weaken it so that branching is exercised.
struct Effort {
  std::size_t root_sweeps = 60;  ///< passes of block-coordinate ascent
  std::size_t node_sweeps = 3;
  bool newton = true;
  double sweeps_work = 1.0;          ///< multiplies the work after which Newton's method takes over; 0: at once
  bool incumbents = true;            ///< local search before the tree and from rounded nodes
  bool strike = true;                ///< actions above the threshold are struck off
  std::uint64_t enumerate_at = 400;  ///< nodes of at most so many candidates are enumerated
  std::size_t batch = 32;            ///< nodes worked on against one threshold
  std::size_t most_open_bytes = std::size_t{1} << 30;
};

Proof prove(const RootGram& root, const Restriction& restriction, const Limits& limits,
            std::span<const search::Choice> hints, const Effort& effort);

}  // namespace formsieve::proof

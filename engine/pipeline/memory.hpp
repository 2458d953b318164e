// The memory that a search will take, and whether it is there.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/run.hpp>

#include "pipeline/prepare.hpp"

#include <cstdint>
#include <optional>

namespace formsieve::pipeline {

/// Bytes that a search takes beyond the table and the columns in use, which are in memory before it is asked.
struct MemoryNeed {
  double grams = 0.0;     ///< the matrices of all folds: exact
  double building = 0.0;  ///< what their construction takes besides, at its widest: see design::gram_building_bytes
  /// Of each thread a copy of the matrices of every fold at each level of the walk, which shrink from all columns to
  /// none: together as much as a third of the levels, at most four, would take at full size.
  double walk = 0.0;
  double pool = 0.0;       ///< the pool's lists, about 1 kB for a candidate and 8 kB for one that has been examined
  double examining = 0.0;  ///< of each thread the design matrix of one candidate with its factorisation

  /// At the widest moment: construction ends before the walk begins, and the walk before the examination.
  double peak() const;
};

/// `threads`: 0 for all that the process may use. Cost nothing to speak of.
MemoryNeed memory_need(const Prepared& prepared, const run::Plan& plan, unsigned threads);

/// Error (kind plan) when the search would take more than `available` bytes; names the plan key that helps most and the
/// value that would fit. Nothing known of the memory: no error.
Status check_memory(const Prepared& prepared, const run::Plan& plan, unsigned threads,
                    std::optional<std::uint64_t> available);

}  // namespace formsieve::pipeline

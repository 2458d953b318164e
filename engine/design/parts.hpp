// How the rows of one repeat are cut into the pieces that sums over rows are made of, and what summing a piece needs.
#pragma once

#include "design/moments.hpp"

#include <cstddef>
#include <cstdint>
#include <memory>
#include <mutex>
#include <vector>

namespace formsieve::design {

/// A run of rows of one fold, summed in one piece.
struct Part {
  std::size_t fold;
  std::size_t number;  ///< within the fold
  std::vector<std::uint32_t> rows;
};

/// Rows of one part, the last of a fold apart, given the rows of all folds.
std::size_t rows_in_part(std::size_t n_rows);

/// The rows of each fold cut into parts, by the rows and folds alone. Parts of a fold stand together, folds rising.
std::vector<Part> cut(const std::vector<std::uint32_t>& fold_of, std::size_t n_folds);

/// The parts in the order in which to sum them: those of the same number lie in about the same rows of the table, whose
/// values are then still in a cache.
std::vector<std::size_t> working_order(const std::vector<Part>& parts);

/// What the sums of one part need: kept for the next part, since fresh memory costs as much as the sums.
struct PartWorkspace {
  std::vector<double> values;
  std::vector<double> weights;
  BlockWorkspace block;
};

/// Workspaces that the parts take in turn, as many as there are parts at the same time.
class PartWorkspaces {
 public:
  std::unique_ptr<PartWorkspace> take();
  void give_back(std::unique_ptr<PartWorkspace> workspace);

 private:
  std::mutex mutex_;
  std::vector<std::unique_ptr<PartWorkspace>> idle_;
};

}  // namespace formsieve::design

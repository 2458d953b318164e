#include "design/parts.hpp"

#include "base/sums.hpp"

#include <algorithm>
#include <numeric>
#include <utility>

namespace formsieve::design {

namespace {

/// Parts of the sum over rows of one repeat, at most about this many: bounds the memory that their sums take.
constexpr std::size_t kMostParts = 256;
/// Chunks of rows in one part, at least: so that joining sums costs little beside making them.
constexpr std::size_t kFewestChunks = 4;

}  // namespace

std::size_t rows_in_part(std::size_t n_rows) {
  return base::kRowChunk * std::max(kFewestChunks, n_rows / base::kRowChunk / kMostParts);
}

std::vector<Part> cut(const std::vector<std::uint32_t>& fold_of, std::size_t n_folds) {
  std::vector<std::vector<std::uint32_t>> rows(n_folds);
  for (std::size_t i = 0; i < fold_of.size(); ++i) rows[fold_of[i]].push_back(static_cast<std::uint32_t>(i));
  const std::size_t part_size = rows_in_part(fold_of.size());
  std::vector<Part> parts;
  for (std::size_t fold = 0; fold < n_folds; ++fold) {
    const auto& all = rows[fold];
    for (std::size_t first = 0; first < all.size(); first += part_size) {
      const std::size_t last = std::min(first + part_size, all.size());
      parts.push_back(
          {fold,
           first / part_size,
           {all.begin() + static_cast<std::ptrdiff_t>(first), all.begin() + static_cast<std::ptrdiff_t>(last)}});
    }
  }
  return parts;
}

std::vector<std::size_t> working_order(const std::vector<Part>& parts) {
  std::vector<std::size_t> order(parts.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return parts[a].number < parts[b].number; });
  return order;
}

std::unique_ptr<PartWorkspace> PartWorkspaces::take() {
  const std::lock_guard lock(mutex_);
  if (idle_.empty()) return std::make_unique<PartWorkspace>();
  auto workspace = std::move(idle_.back());
  idle_.pop_back();
  return workspace;
}

void PartWorkspaces::give_back(std::unique_ptr<PartWorkspace> workspace) {
  const std::lock_guard lock(mutex_);
  idle_.push_back(std::move(workspace));
}

}  // namespace formsieve::design

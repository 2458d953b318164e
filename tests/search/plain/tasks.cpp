#include "plain/tasks.hpp"

#include <algorithm>

namespace formsieve::plain {

using namespace search;

namespace {

/// A part is about this share of the space: several hundred parts where the space allows, so that the last ones to
/// finish leave no core idle for long.
constexpr std::uint64_t kShareOfSpace = 1024;
/// Reaching a node eliminates its path in all folds, as much work as some hundred candidates.
constexpr std::uint64_t kSmallestPart = 500;

void add_nodes(const Tree& tree, std::uint64_t largest_subtree, std::size_t open, Path& path,
               std::vector<Path>& parts) {
  parts.push_back(path);
  const std::size_t depth = path.size();
  if (!tree.has_children(depth, open)) return;
  for (std::size_t q = open; q-- > tree.first_pick(depth, open);) {
    if (!tree.has_children(depth + 1, q) || tree.size(depth + 1, q) <= largest_subtree) continue;
    for (std::size_t f = tree.n_forms(q); f < tree.n_forms(q + 1); ++f) {
      path.push_back(f);
      add_nodes(tree, largest_subtree, q, path, parts);
      path.pop_back();
    }
  }
}

}  // namespace

std::uint64_t largest_subtree(const Tree& tree) {
  return std::max(kSmallestPart, tree.size(0, tree.n_predictors()) / kShareOfSpace);
}

std::vector<Path> split(const Tree& tree, std::uint64_t largest_subtree) {
  std::vector<Path> parts;
  Path path;
  if (tree.size(0, tree.n_predictors()) > 0) add_nodes(tree, largest_subtree, tree.n_predictors(), path, parts);
  return parts;
}

}  // namespace formsieve::plain

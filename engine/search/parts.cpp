#include "search/parts.hpp"

#include <algorithm>

namespace formsieve::search {

namespace {

/// A subtree beyond this share of the space is a part of its own: thousands of parts where the space allows, so that
/// the last ones to finish leave none of 64 cores idle for long.
constexpr std::uint64_t kShareOfSpace = 16384;
/// Reaching a node brings its path into every fold, as much work as some thousand candidates.
constexpr std::uint64_t kSmallestPart = 20'000;

void add_kernel_parts(const PairShape& shape, std::size_t open, std::uint64_t largest, Part& part,
                      std::vector<Part>& parts) {
  const std::size_t level = part.lanes.size();
  if (level + 3 > shape.most_picks) return;
  for (std::size_t p = open; p-- > 2;) {
    if (shape.size(shape.most_picks - level - 1, p) <= largest) continue;
    for (std::size_t lane = shape.first_lane[p]; lane < shape.first_lane[p + 1]; ++lane) {
      part.lanes.push_back(lane);
      parts.push_back(part);
      add_kernel_parts(shape, p, largest, part, parts);
      part.lanes.pop_back();
    }
  }
}

void add_outer_parts(const OuterTree& tree, std::uint64_t largest, OuterPath& path, std::vector<Part>& parts) {
  const bool whole = tree.size(path) <= largest;
  Part part{path, {}, whole};
  parts.push_back(part);
  if (whole) return;
  if (tree.is_candidate(path)) {
    const PairShape shape = tree.shape(tree.open_simple(path), tree.most_terms() - path.size());
    add_kernel_parts(shape, shape.n_predictors(), largest, part, parts);
  }
  if (!tree.may_pick(path)) return;
  for (std::size_t g = tree.open_groups(path); g-- > tree.first_group(path);) {
    for (std::size_t form = tree.first_form(g); form < tree.end_form(g); ++form) {
      path.push_back(form);
      add_outer_parts(tree, largest, path, parts);
      path.pop_back();
    }
  }
}

}  // namespace

std::uint64_t largest_subtree(const OuterTree& tree) { return std::max(kSmallestPart, tree.size({}) / kShareOfSpace); }

std::vector<Part> split(const OuterTree& tree, std::uint64_t largest) {
  std::vector<Part> parts;
  OuterPath path;
  if (tree.size(path) > 0) add_outer_parts(tree, largest, path, parts);
  return parts;
}

}  // namespace formsieve::search

#include "design/moments.hpp"

#include "base/sums.hpp"
#include "design/cross_product_kernel.hpp"

#include <cassert>
#include <utility>

namespace formsieve::design {

namespace {

/// Joins moments whose cross-products stand `stride` apart to a set, in the lower triangle.
void join_lower(Moments& set, double weight, const double* mean, const double* cross, std::size_t stride) {
  const std::size_t order = set.order();
  const double joined = set.weight + weight;
  std::vector<double> d(order);
  for (std::size_t c = 0; c < order; ++c) d[c] = mean[c] - set.mean[c];
  const double factor = set.weight / joined * weight;
  for (std::size_t j = 0; j < order; ++j) {
    double* own = set.cross.data() + j * order;
    const double* other = cross + j * stride;
    for (std::size_t i = j; i < order; ++i) own[i] += other[i] + factor * (d[i] * d[j]);
  }
  for (std::size_t c = 0; c < order; ++c) set.mean[c] += weight / joined * d[c];
  set.weight = joined;
}

}  // namespace

void add_block(Moments& set, const RowBlock& block, std::span<const double> weights, BlockWorkspace& workspace) {
  const std::size_t stride = padded(block.n_columns);
  workspace.panels.resize(panels_size(block.n_rows, block.n_columns));
  workspace.mean.resize(stride);
  workspace.cross.resize(stride * stride);
  const double weight = weights.empty() ? static_cast<double>(block.n_rows) : base::sum(weights);
  pack_centred(block.values, base::kRowChunk, block.n_rows, block.n_columns, weights.empty() ? nullptr : weights.data(),
               weight, workspace.panels.data(), workspace.mean.data());
  cross_products(workspace.panels.data(), block.n_rows, block.n_columns, workspace.cross.data());
  set.mean.resize(block.n_columns);
  set.cross.resize(block.n_columns * block.n_columns);
  join_lower(set, weight, workspace.mean.data(), workspace.cross.data(), stride);
}

void mirror(Moments& set) {
  const std::size_t order = set.order();
  for (std::size_t j = 0; j < order; ++j)
    for (std::size_t i = j + 1; i < order; ++i) set.cross[j + i * order] = set.cross[i + j * order];
}

Moments moments_of(const RowBlock& block, std::span<const double> weights, BlockWorkspace& workspace) {
  Moments result;
  add_block(result, block, weights, workspace);
  mirror(result);
  return result;
}

void add_outer_product(std::vector<double>& matrix, double factor, std::span<const double> d) {
  const std::size_t order = d.size();
  // the product of the two first: then equal columns have equal entries wherever they stand
  for (std::size_t j = 0; j < order; ++j)
    for (std::size_t i = 0; i < order; ++i) matrix[i + j * order] += factor * (d[i] * d[j]);
}

void join(Moments& set, const Moments& other) {
  if (other.weight == 0.0) return;
  if (set.weight == 0.0) {
    set = other;
    return;
  }
  assert(set.order() == other.order());
  const double weight = set.weight + other.weight;
  std::vector<double> d(set.order());
  for (std::size_t c = 0; c < d.size(); ++c) d[c] = other.mean[c] - set.mean[c];
  for (std::size_t i = 0; i < set.cross.size(); ++i) set.cross[i] += other.cross[i];
  add_outer_product(set.cross, set.weight / weight * other.weight, d);
  for (std::size_t c = 0; c < d.size(); ++c) set.mean[c] += other.weight / weight * d[c];
  set.weight = weight;
}

Moments join_all(std::vector<Moments> sets) {
  for (std::size_t step = 1; step < sets.size(); step *= 2)
    for (std::size_t i = 0; i + step < sets.size(); i += 2 * step) join(sets[i], sets[i + step]);
  return sets.empty() ? Moments{} : std::move(sets.front());
}

}  // namespace formsieve::design

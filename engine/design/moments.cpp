#include "design/moments.hpp"

#include "base/sums.hpp"
#include "design/cross_product_kernel.hpp"

#include <cassert>
#include <cmath>
#include <numeric>

namespace formsieve::design {

Moments moments_of(const RowBlock& block, std::span<const double> weights, BlockWorkspace& workspace) {
  const std::size_t n_rows = block.n_rows;
  Moments result;
  result.weight = weights.empty() ? static_cast<double>(n_rows) : base::sum(weights);
  result.mean.resize(block.n_columns);
  result.cross.resize(block.n_columns * block.n_columns);
  workspace.centred.resize(block.n_columns * n_rows);
  workspace.panels.resize(panels_size(n_rows, block.n_columns));
  for (std::size_t c = 0; c < block.n_columns; ++c) {
    const std::span<const double> column(block.values + c * base::kRowChunk, n_rows);
    const double mean = base::weighted_mean(column, weights);
    double* centred = workspace.centred.data() + c * n_rows;
    for (std::size_t i = 0; i < n_rows; ++i) centred[i] = column[i] - mean;
    if (!weights.empty())
      for (std::size_t i = 0; i < n_rows; ++i) centred[i] *= std::sqrt(weights[i]);
    result.mean[c] = mean;
  }
  pack(workspace.centred.data(), n_rows, n_rows, block.n_columns, workspace.panels.data());
  cross_products(workspace.panels.data(), n_rows, block.n_columns, result.cross.data());
  return result;
}

void add_outer_product(std::vector<double>& matrix, double factor, std::span<const double> d) {
  const std::size_t order = d.size();
  for (std::size_t j = 0; j < order; ++j) {
    const double scaled = factor * d[j];
    for (std::size_t i = 0; i < j; ++i) {
      matrix[i + j * order] += scaled * d[i];
      matrix[j + i * order] = matrix[i + j * order];
    }
    matrix[j + j * order] += scaled * d[j];
  }
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

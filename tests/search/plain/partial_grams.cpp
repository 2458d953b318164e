#include "plain/partial_grams.hpp"

#include <limits>
#include <span>

namespace formsieve::plain {

using namespace search;

namespace {

/// Copies one dense matrix of the set into visiting order.
void gather(const Tree& tree, const base::GramSet& grams, std::span<const double> dense, const Half& half) {
  const std::size_t order = grams.order();
  const std::vector<std::size_t>& gram_column = tree.gram_column();
  for (std::size_t i = 0; i < tree.n_columns(); ++i) {
    const double* column = dense.data() + gram_column[i] * order;
    for (std::size_t k = 0; i >= tree.first_row(0) && k < tree.row_length()[i]; ++k)
      half.rows[tree.row_offset()[i] + k] = column[gram_column[k]];
    half.diagonal[i] = column[gram_column[i]];
    for (std::size_t r = 0; r < tree.n_responses(); ++r)
      half.responses[r * half.stride + i] = column[grams.n_columns + r];
  }
  for (std::size_t r = 0; r < tree.n_responses(); ++r) {
    const std::size_t y = grams.n_columns + r;
    half.own[r] = dense[y * order + y];
  }
}

}  // namespace

PartialGrams::PartialGrams(const Tree& tree, std::size_t depth, std::size_t n_folds) {
  const std::size_t n_columns = tree.columns(tree.n_predictors() - depth);
  const std::size_t n_responses = tree.n_responses();
  const std::size_t n_entries = tree.first_row(depth) < n_columns ? tree.row_offset()[n_columns] : 0;
  const std::size_t half_size = n_entries + (1 + n_responses) * n_columns + n_responses;
  values_.assign(2 * (n_folds + 1) * half_size, std::numeric_limits<double>::quiet_NaN());
  const auto half = [&](std::size_t index) {
    double* const rows = values_.data() + index * half_size;
    double* const diagonal = rows + n_entries;
    double* const responses = diagonal + n_columns;
    return Half{rows, diagonal, responses, responses + n_responses * n_columns, n_columns};
  };
  for (std::size_t f = 0; f <= n_folds; ++f) folds_.push_back({half(2 * f), half(2 * f + 1)});
}

Root::Root(const Tree& tree, const base::GramSet& set, double smallest_pivot_rel)
    : n_rows(set.n_rows), n_folds(set.n_folds), grams(tree, 0, set.n_folds) {
  for (std::size_t f = 0; f < n_folds; ++f) {
    gather(tree, set, set.training[f], grams.fold(f).training);
    gather(tree, set, set.validation[f], grams.fold(f).validation);
  }
  gather(tree, set, set.all, grams.all_rows());
  for (std::size_t f = 0; f <= n_folds; ++f) {
    const double* diagonal = grams.fold(f).training.diagonal;
    smallest_pivot.emplace_back();
    for (std::size_t c = 0; c < tree.n_columns(); ++c)
      smallest_pivot.back().push_back(smallest_pivot_rel * diagonal[c]);
  }
}

}  // namespace formsieve::plain

#include "search/outer_grams.hpp"

#include <algorithm>

namespace formsieve::search {

OuterGrams::OuterGrams(std::size_t n_columns, std::size_t n_responses, std::size_t n_folds)
    : n_columns_(n_columns),
      n_responses_(n_responses),
      n_folds_(n_folds),
      training_((n_folds + 1) * order() * order()),
      validation_(n_folds * order() * order()) {}

double OuterGrams::cv_sse(std::size_t response) const {
  const std::size_t own = (n_columns_ + response) * (order() + 1);
  double sum = 0.0;
  for (std::size_t f = 0; f < n_folds_; ++f) sum += validation(f)[own];
  return sum;
}

double OuterGrams::rss(std::size_t response) const {
  return training(n_folds_)[(n_columns_ + response) * (order() + 1)];
}

OuterGrams outer_root(const OuterTree& tree, const base::GramSet& grams, std::size_t first_response,
                      std::size_t n_responses) {
  OuterGrams root(tree.gram_column().size(), n_responses, grams.n_folds);
  std::vector<std::size_t> from = tree.gram_column();
  for (std::size_t r = 0; r < n_responses; ++r) from.push_back(grams.n_columns + first_response + r);
  const auto copy = [&](const std::vector<double>& matrix, double* out) {
    for (std::size_t i = 0; i < from.size(); ++i)
      for (std::size_t j = 0; j < from.size(); ++j)
        out[i * from.size() + j] = matrix[from[i] * grams.order() + from[j]];
  };
  for (std::size_t f = 0; f < grams.n_folds; ++f) {
    copy(grams.training[f], root.training(f));
    copy(grams.validation[f], root.validation(f));
  }
  copy(grams.all, root.training(grams.n_folds));
  return root;
}

std::vector<std::vector<double>> smallest_pivots(const OuterGrams& root, double smallest_rel) {
  std::vector<std::vector<double>> smallest(root.n_folds() + 1);
  for (std::size_t f = 0; f <= root.n_folds(); ++f)
    for (std::size_t c = 0; c < root.n_columns(); ++c)
      smallest[f].push_back(smallest_rel * root.training(f)[c * (root.order() + 1)]);
  return smallest;
}

namespace {

/// The columns and responses that a node keeps: [0, n_open) and [n_columns, order).
struct Kept {
  std::size_t n_open, n_columns, order;
  template <class Body>
  void each(const Body& body) const {
    for (std::size_t i = 0; i < n_open; ++i) body(i);
    for (std::size_t i = n_columns; i < order; ++i) body(i);
  }
};

void copy(const Kept& kept, const double* from, double* to) {
  kept.each([&](std::size_t i) {
    const double* const row = from + i * kept.order;
    double* const out = to + i * kept.order;
    std::copy(row, row + kept.n_open, out);
    std::copy(row + kept.n_columns, row + kept.order, out + kept.n_columns);
  });
}

/// A −= m A_c·, and with t = V_c· − ½ V_cc m also V −= m t + t m; head of walk.hpp. Scratch: m, t.
void eliminate(const Kept& kept, std::size_t c, double* a, double* v, double* m, double* t) {
  const std::size_t order = kept.order;
  const double pivot = a[c * order + c];
  const double half_vcc = v == nullptr ? 0.0 : 0.5 * v[c * order + c];
  kept.each([&](std::size_t j) {
    m[j] = a[c * order + j] / pivot;
    if (v != nullptr) t[j] = v[c * order + j] - half_vcc * m[j];
  });
  const double* const pivot_row = a + c * order;
  kept.each([&](std::size_t i) {
    if (i == c) return;
    double* const row = a + i * order;
    kept.each([&](std::size_t j) { row[j] -= m[i] * pivot_row[j]; });
    if (v == nullptr) return;
    double* const held_out = v + i * order;
    kept.each([&](std::size_t j) { held_out[j] -= m[i] * t[j] + t[i] * m[j]; });
  });
}

}  // namespace

bool bring_in(const OuterForm& form, const OuterGrams& parent, OuterGrams& child,
              const std::vector<std::vector<double>>& smallest, std::vector<double>& scratch) {
  const std::size_t order = parent.order();
  double* const m = scratch.data();
  double* const t = m + order;
  for (std::size_t f = 0; f <= parent.n_folds(); ++f) {
    const bool is_fold = f < parent.n_folds();
    double* const a = child.training(f);
    double* const v = is_fold ? child.validation(f) : nullptr;
    Kept kept{form.first_column + form.n_columns, parent.n_columns(), order};
    copy(kept, parent.training(f), a);
    if (is_fold) copy(kept, parent.validation(f), v);
    for (std::size_t c = form.first_column + form.n_columns; c-- > form.first_column;) {
      if (!(a[c * order + c] > smallest[f][c])) return false;
      kept.n_open = c + 1;
      eliminate(kept, c, a, v, m, t);
    }
  }
  return true;
}

}  // namespace formsieve::search

#include "search/inseparable.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::search {

namespace {

/// The smallest pivot, relative to the column's diagonal before any elimination, when the columns of both blocks are
/// brought in one after another.
double smallest_pivot(const std::vector<double>& a, std::size_t order, std::vector<std::size_t> columns) {
  const std::size_t n = columns.size();
  std::vector<double> small(n * n);
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t j = 0; j < n; ++j) small[i * n + j] = a[columns[i] * order + columns[j]];
  double smallest = std::numeric_limits<double>::infinity();
  for (std::size_t c = 0; c < n; ++c) {
    const double before = a[columns[c] * (order + 1)];
    const double pivot = small[c * (n + 1)];
    if (!(pivot > 0.0) || !(before > 0.0)) return 0.0;
    smallest = std::min(smallest, pivot / before);
    for (std::size_t i = c + 1; i < n; ++i) {
      const double m = small[i * n + c] / pivot;
      for (std::size_t j = c; j < n; ++j) small[i * n + j] -= m * small[c * n + j];
    }
  }
  return smallest;
}

std::vector<std::size_t> columns_of(const FormBlock& a, const FormBlock* b) {
  std::vector<std::size_t> columns;
  for (std::size_t c = 0; c < a.n_columns; ++c) columns.push_back(a.first_column + c);
  for (std::size_t c = 0; b != nullptr && c < b->n_columns; ++c) columns.push_back(b->first_column + c);
  return columns;
}

double in_worst_fold(const base::GramSet& grams, const FormBlock& a, const FormBlock* b) {
  const std::vector<std::size_t> columns = columns_of(a, b);
  double smallest = smallest_pivot(grams.all, grams.order(), columns);
  for (const auto& training : grams.training)
    smallest = std::min(smallest, smallest_pivot(training, grams.order(), columns));
  return smallest;
}

void note(InseparablePair& pair, std::size_t first_form, std::size_t second_form, double smallest) {
  if (pair.n_pairs_of_forms++ > 0 && smallest >= pair.smallest_rel) return;
  pair.first_choice = static_cast<std::uint16_t>(first_form + 1);
  pair.second_choice = static_cast<std::uint16_t>(second_form + 1);
  pair.smallest_rel = smallest;
}

}  // namespace

std::vector<InseparablePair> inseparable_pairs(const Space& space, const base::GramSet& grams,
                                               double smallest_pivot_rel) {
  std::vector<InseparablePair> pairs;
  std::vector<std::vector<bool>> usable(space.predictors.size());
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    InseparablePair alone{j, j};
    const auto& forms = space.predictors[j].forms;
    for (std::size_t f = 0; f < forms.size(); ++f) {
      const double own = in_worst_fold(grams, forms[f], nullptr);
      usable[j].push_back(own > smallest_pivot_rel);
      if (!usable[j].back()) note(alone, f, f, own);
    }
    if (alone.n_pairs_of_forms > 0) pairs.push_back(alone);
    for (std::size_t i = 0; i < j; ++i) {
      InseparablePair pair{i, j};
      for (std::size_t f = 0; f < forms.size(); ++f) {
        for (std::size_t e = 0; e < space.predictors[i].forms.size() && usable[j][f]; ++e) {
          if (!usable[i][e]) continue;
          const double left = in_worst_fold(grams, space.predictors[i].forms[e], &forms[f]);
          if (!(left > smallest_pivot_rel)) note(pair, e, f, left);
        }
      }
      if (pair.n_pairs_of_forms > 0) pairs.push_back(pair);
    }
  }
  return pairs;
}

}  // namespace formsieve::search

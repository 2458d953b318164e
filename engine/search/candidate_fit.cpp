#include "search/candidate_fit.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::search {

void columns_of(const Space& space, std::span<const std::uint16_t> choice, std::vector<std::size_t>& columns) {
  columns.clear();
  for (std::size_t j = 0; j < choice.size(); ++j) {
    if (choice[j] == 0) continue;
    const FormBlock& form = space.predictors[j].forms[choice[j] - 1u];
    for (std::size_t c = 0; c < form.n_columns; ++c) columns.push_back(form.first_column + c);
  }
}

bool CandidateFit::solve(std::span<const double> training, std::size_t order, std::span<const std::size_t> columns,
                         std::size_t response) {
  const std::size_t k = columns.size();
  lower_.resize(k * k);
  coefficients_.resize(k);
  // row i of `lower_`: L left of the diagonal, the pivot on it
  for (std::size_t i = 0; i < k; ++i) {
    const double* gram = training.data() + columns[i] * order;
    double* row = lower_.data() + i * k;
    double pivot = gram[columns[i]];
    double reduced = gram[response];
    for (std::size_t j = 0; j < i; ++j) {
      const double* other = lower_.data() + j * k;
      double entry = gram[columns[j]];
      for (std::size_t p = 0; p < j; ++p) entry -= row[p] * other[p];
      row[j] = entry;  // L_ij D_j until the row is done
    }
    for (std::size_t j = 0; j < i; ++j) {
      const double scaled = row[j] / lower_[j * k + j];
      pivot -= scaled * row[j];
      reduced -= scaled * coefficients_[j];
      row[j] = scaled;
    }
    if (!(pivot > kSmallestPivot_rel * gram[columns[i]])) return false;
    row[i] = pivot;
    coefficients_[i] = reduced;
  }
  for (std::size_t i = k; i-- > 0;) {
    coefficients_[i] /= lower_[i * k + i];
    for (std::size_t j = i + 1; j < k; ++j) coefficients_[i] -= lower_[j * k + i] * coefficients_[j];
  }
  return true;
}

double CandidateFit::held_out_product(std::span<const double> validation, std::size_t order,
                                      std::span<const std::size_t> columns, std::size_t response,
                                      std::size_t other) const {
  const double* gram = validation.data() + other * order;
  double product = gram[response];
  for (std::size_t i = 0; i < columns.size(); ++i) product -= coefficients_[i] * gram[columns[i]];
  return product;
}

double CandidateFit::held_out_sse(std::span<const double> validation, std::size_t order,
                                  std::span<const std::size_t> columns, std::size_t response) const {
  double sse = held_out_product(validation, order, columns, response, response);
  for (std::size_t i = 0; i < columns.size(); ++i)
    sse -= coefficients_[i] * held_out_product(validation, order, columns, response, columns[i]);
  return sse;
}

double cv_sse_of(const base::GramSet& grams, std::span<const std::size_t> columns, std::size_t response,
                 CandidateFit& fit) {
  const std::size_t order = grams.order();
  const std::size_t y = grams.n_columns + response;
  double sse = 0.0;
  for (std::size_t f = 0; f < grams.n_folds; ++f) {
    if (!fit.solve(grams.training[f], order, columns, y)) return std::numeric_limits<double>::infinity();
    sse += fit.held_out_sse(grams.validation[f], order, columns, y);
  }
  if (!fit.solve(grams.all, order, columns, y)) return std::numeric_limits<double>::infinity();
  return std::max(sse, 0.0);  // rounding can carry an exact fit below zero
}

}  // namespace formsieve::search

#include "search/guided_pairs.hpp"

#include <algorithm>
#include <limits>
#include <utility>

namespace formsieve::search {

/// The fold's matrices of the columns in question with the base eliminated; false when it is inseparable.
bool PairLook::reduce(const ObjectiveFold& fold) {
  const std::size_t n = columns_.size();
  reduced_.resize(n + 1);
  for (std::size_t i = 0; i < n; ++i) {
    const double* const a = fold.a + columns_[i] * fold.a_order;
    const double* const v = fold.v + columns_[i] * fold.v_order;
    for (std::size_t j = 0; j <= i; ++j) {
      reduced_.a(i, j) = a[columns_[j]];
      reduced_.v(i, j) = v[columns_[j]];
    }
    reduced_.a(n, i) = fold.a_y[columns_[i]];
    reduced_.v(n, i) = fold.v_y[columns_[i]];
  }
  reduced_.v(n, n) = fold.v_yy;
  least_ = fold.least;
  for (std::size_t c = 0; c < n_base_; ++c)
    if (!reduced_.eliminate(c, least_[columns_[c]])) return false;
  return true;
}

/// Held-out SSE with these two choices in the reduced fold.
double PairLook::score(std::size_t first, std::size_t second) {
  picked_.clear();
  for (const Option& option : {options_[0][first], options_[1][second]})
    for (std::size_t c = 0; c < option.n_columns; ++c) picked_.push_back(option.at + c);
  const std::size_t n = picked_.size();
  picked_.push_back(columns_.size());
  small_.resize(n + 1);
  for (std::size_t i = 0; i <= n; ++i) {
    for (std::size_t j = 0; j <= i; ++j) {
      small_.a(i, j) = reduced_.a(picked_[i], picked_[j]);
      small_.v(i, j) = reduced_.v(picked_[i], picked_[j]);
    }
  }
  for (std::size_t i = 0; i < n; ++i)
    if (!small_.eliminate(i, least_[columns_[picked_[i]]])) return std::numeric_limits<double>::infinity();
  return small_.sse();
}

const std::vector<double>& PairLook::look(const Choices& base, std::size_t first, std::size_t second) {
  columns_of(space_.space(), base, columns_);
  n_base_ = columns_.size();
  for (const auto& [predictor, options] : {std::pair{first, &options_[0]}, std::pair{second, &options_[1]}}) {
    options->assign(1, {0, 0});
    for (const FormBlock& form : space_.space().predictors[predictor].forms) {
      options->push_back({columns_.size(), form.n_columns});
      for (std::size_t c = 0; c < form.n_columns; ++c) columns_.push_back(form.first_column + c);
    }
  }
  const std::size_t n_second = options_[1].size();
  scores_.assign(options_[0].size() * n_second, 0.0);
  for (std::size_t f = 0; f < objective_.n_folds(); ++f) {
    const bool separable = reduce(objective_.fold(f));
    for (std::size_t i = 0; i < scores_.size(); ++i)
      scores_[i] += separable ? score(i / n_second, i % n_second) : std::numeric_limits<double>::infinity();
  }
  for (double& score : scores_) score = std::max(score, 0.0) * objective_.unit();
  return scores_;
}

}  // namespace formsieve::search

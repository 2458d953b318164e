#include "search/guided_elimination.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::search {

void SmallFold::resize(std::size_t order) {
  order_ = order;
  stride_ = (order + kSmallGrain - 1) / kSmallGrain * kSmallGrain;
  a_.resize(std::max(a_.size(), order_ * stride_));
  v_.resize(a_.size());
  scratch_.resize(std::max(scratch_.size(), 3 * stride_));
}

bool SmallFold::eliminate(std::size_t c, double least) {
  if (!(a(c, c) > least)) return false;
  eliminate_dense(a_.data(), v_.data(), order_, stride_, c, scratch_.data());
  return true;
}

void Elimination::begin(const ObjectiveFold& fold, OpenState& state) {
  fold_ = fold;
  n_ = 0;
  std::copy_n(fold.a_diagonal, 4 * width_, state.at(0));  // the four rows lie one after another
  state.sse = fold.v_yy;
  state.separable = true;
}

void Elimination::push(const OpenForm& form, OpenState& state) {
  for (std::size_t c = 0; c < form.n_columns && state.separable; ++c) push_column(form.first_column + c, state);
}

void Elimination::push_column(std::size_t column, OpenState& state) {
  const double pivot = state.at(0)[column];
  if (!(pivot > fold_.least[column])) {
    state.separable = false;
    return;
  }
  if (a_.size() < (n_ + 1) * width_) {
    a_.resize((n_ + 1) * width_);
    v_.resize((n_ + 1) * width_);
    pivots_.resize(n_ + 1);
    l_.resize(n_ + 1);
    h_.resize(n_ + 1);
  }
  const PivotRowsView earlier{a_.data(), v_.data(), n_, width_};
  for (std::size_t j = 0; j < n_; ++j) {
    const PivotScalars& other = pivots_[j];
    l_[j] = a_[j * width_ + column] * other.inverse;
    h_[j] = (v_[j * width_ + column] - l_[j] * other.v_pivot) * other.inverse;
  }
  double* const a = a_.data() + n_ * width_;
  double* const v = v_.data() + n_ * width_;
  copy_padded(fold_.a + column * fold_.a_order, a);
  copy_padded(fold_.v + column * fold_.v_order, v);
  reduce_rows(earlier, l_.data(), h_.data(), a, v);
  PivotScalars& own = pivots_[n_];
  own.inverse = 1.0 / pivot;
  own.v_pivot = state.at(1)[column];
  const double v_y = state.at(3)[column];
  own.m_y = state.at(2)[column] * own.inverse;
  own.h_y = (v_y - own.m_y * own.v_pivot) * own.inverse;
  state.sse -= own.m_y * (2.0 * v_y - own.m_y * own.v_pivot);
  eliminate_pivot(own, a, v, width_, state.columns());
  ++n_;
}

void Elimination::copy_padded(const double* from, double* to) const {
  std::copy_n(from, n_columns_, to);
  std::fill(to + n_columns_, to + width_, 0.0);
}

double Elimination::score_wide(const OpenForm& form, OpenState& state) {
  const std::size_t w = form.n_columns;
  small_.resize(w + 1);
  const double* const open = state.at(0);
  for (std::size_t i = 0; i < w; ++i) {
    const std::size_t c = form.first_column + i;
    small_.a(i, i) = open[c];
    small_.v(i, i) = open[width_ + c];
    small_.a(w, i) = open[2 * width_ + c];
    small_.v(w, i) = open[3 * width_ + c];
    for (std::size_t j = 0; j < i; ++j) {
      const std::size_t d = form.first_column + j;
      double a = fold_.a[d + c * fold_.a_order];
      double v = fold_.v[d + c * fold_.v_order];
      for (std::size_t p = 0; p < n_; ++p) {
        const double a_c = a_[p * width_ + c];
        const double a_d = a_[p * width_ + d];
        const double m_c = a_c * pivots_[p].inverse;
        const double m_d = a_d * pivots_[p].inverse;
        a -= m_c * a_d;
        v -= m_c * v_[p * width_ + d] + m_d * (v_[p * width_ + c] - m_c * pivots_[p].v_pivot);
      }
      small_.a(i, j) = a;
      small_.v(i, j) = v;
    }
  }
  small_.v(w, w) = state.sse;
  for (std::size_t i = 0; i < w; ++i)
    if (!small_.eliminate(i, fold_.least[form.first_column + i])) return std::numeric_limits<double>::infinity();
  return small_.sse();
}

}  // namespace formsieve::search

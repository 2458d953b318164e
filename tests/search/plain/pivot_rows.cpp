#include "plain/pivot_rows.hpp"

#include "plain/elimination_kernel.hpp"
#include "plain/independent.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::plain {

using namespace search;

PivotRows::PivotRows(std::size_t most_open_columns, std::size_t n_responses, std::size_t most_pivots)
    : n_responses_(n_responses) {
  const std::size_t most = most_pivots * (most_open_columns + n_responses + most_pivots);
  for (std::vector<double>* rows : {&a_, &v_, &m_, &t_}) rows->assign(most, std::numeric_limits<double>::quiet_NaN());
}

bool PivotRows::load(const Tree& tree, const TreeForm& form, std::size_t n_open, const Half& training,
                     const Half* validation, const double* smallest_pivot) {
  n_open_ = n_open;
  n_pivots_ = form.n_columns;
  width_ = n_open_ + n_responses_ + n_pivots_;
  read(tree, form.first_column, training, a_);
  if (validation != nullptr) read(tree, form.first_column, *validation, v_);
  return eliminate(smallest_pivot + form.first_column, validation != nullptr);
}

void PivotRows::read(const Tree& tree, std::size_t first, const Half& half, std::vector<double>& rows) const {
  for (std::size_t p = 0; p < n_pivots_; ++p) {
    const std::size_t c = first + p;
    const double* stored = half.rows + tree.row_offset()[c];
    double* own = std::copy_n(stored, n_open_, row(rows, p));
    for (std::size_t r = 0; r < n_responses_; ++r) *own++ = half.responses[r * half.stride + c];
    own[p] = half.diagonal[c];
    for (std::size_t q = 0; q < p; ++q) {
      own[q] = stored[first + q];
      row(rows, q)[n_open_ + n_responses_ + p] = own[q];
    }
  }
}

bool PivotRows::eliminate(const double* smallest_pivot, bool with_validation) {
  const std::size_t own = n_open_ + n_responses_;
  for (std::size_t p = 0; p < n_pivots_; ++p) {
    const double* a = row(a_, p);
    const double* v = row(v_, p);
    double* m = row(m_, p);
    double* t = row(t_, p);
    if (!is_separable(a[own + p], smallest_pivot[p])) return false;
    const double inverse = 1.0 / a[own + p];
    const double half_own = with_validation ? 0.5 * v[own + p] : 0.0;
    for (std::size_t k = 0; k < width_; ++k) m[k] = a[k] * inverse;
    for (std::size_t k = 0; with_validation && k < width_; ++k) t[k] = v[k] - half_own * m[k];
    for (std::size_t q = p + 1; q < n_pivots_; ++q) {
      double* a_later = row(a_, q);
      double* v_later = row(v_, q);
      const double m_q = m[own + q];
      const double t_q = t[own + q];
      FORMSIEVE_INDEPENDENT
      for (std::size_t k = 0; k < width_; ++k) a_later[k] -= m_q * a[k];
      if (!with_validation) continue;
      FORMSIEVE_INDEPENDENT
      for (std::size_t k = 0; k < width_; ++k) v_later[k] -= m_q * t[k] + t_q * m[k];
    }
  }
  return true;
}

double PivotRows::training_change(std::size_t r) const {
  double change = 0.0;
  for (std::size_t p = 0; p < n_pivots_; ++p) change -= row(m_, p)[n_open_ + r] * row(a_, p)[n_open_ + r];
  return change;
}

double PivotRows::validation_change(std::size_t r) const {
  double change = 0.0;
  for (std::size_t p = 0; p < n_pivots_; ++p) change -= 2.0 * row(m_, p)[n_open_ + r] * row(t_, p)[n_open_ + r];
  return change;
}

void PivotRows::apply_training(const Tree& tree, std::size_t first_row, const Half& parent, const Half& child) const {
  for (std::size_t p = 0; p < n_pivots_; ++p) {
    const Half& from = p == 0 ? parent : child;
    const double* a = row(a_, p);
    const double* m = row(m_, p);
    const auto update = [&](const double* before, double* after, double m_i, std::size_t n) {
      FORMSIEVE_INDEPENDENT
      for (std::size_t k = 0; k < n; ++k) after[k] = before[k] - m_i * a[k];
    };
    for (std::size_t i = 0; i < n_open_; ++i) {
      if (i >= first_row)
        update(from.rows + tree.row_offset()[i], child.rows + tree.row_offset()[i], m[i], tree.row_length()[i]);
      child.diagonal[i] = from.diagonal[i] - m[i] * a[i];
    }
    for (std::size_t r = 0; r < n_responses_; ++r) {
      update(from.responses + r * from.stride, child.responses + r * child.stride, m[n_open_ + r], n_open_);
      child.own[r] = from.own[r] - m[n_open_ + r] * a[n_open_ + r];
    }
  }
}

void PivotRows::apply_validation(const Tree& tree, std::size_t first_row, const Half& parent, const Half& child) const {
  for (std::size_t p = 0; p < n_pivots_; ++p) {
    const Half& from = p == 0 ? parent : child;
    const double* m = row(m_, p);
    const double* t = row(t_, p);
    const auto update = [&](const double* before, double* after, std::size_t i, std::size_t n) {
      const double m_i = m[i];
      const double t_i = t[i];
      FORMSIEVE_INDEPENDENT
      for (std::size_t k = 0; k < n; ++k) after[k] = before[k] - (m_i * t[k] + t_i * m[k]);
    };
    for (std::size_t i = 0; i < n_open_; ++i) {
      if (i >= first_row)
        update(from.rows + tree.row_offset()[i], child.rows + tree.row_offset()[i], i, tree.row_length()[i]);
      child.diagonal[i] = from.diagonal[i] - 2.0 * m[i] * t[i];
    }
    for (std::size_t r = 0; r < n_responses_; ++r) {
      update(from.responses + r * from.stride, child.responses + r * child.stride, n_open_ + r, n_open_);
      child.own[r] = from.own[r] - 2.0 * m[n_open_ + r] * t[n_open_ + r];
    }
  }
}

}  // namespace formsieve::plain

#include "plain/elimination_kernel.hpp"

#include "plain/independent.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::plain {

using namespace search;

void clear(const ColumnScores& scores, std::size_t n_responses) {
  std::fill(scores.margin + scores.first, scores.margin + scores.last, std::numeric_limits<double>::infinity());
  for (std::size_t r = 0; r < n_responses; ++r) {
    double* cv_sse = scores.cv_sse + r * scores.stride;
    std::fill(cv_sse + scores.first, cv_sse + scores.last, 0.0);
  }
}

namespace {

void invert_pivots(const Half& training, const double* smallest_pivot, const ColumnScores& scores) {
  const double* diagonal = training.diagonal;
  double* inverse = scores.inverse;
  double* margin = scores.margin;
  FORMSIEVE_INDEPENDENT
  for (std::size_t c = scores.first; c < scores.last; ++c) {
    const double slack = diagonal[c] - smallest_pivot[c];
    margin[c] = slack < margin[c] ? slack : margin[c];
    inverse[c] = 1.0 / diagonal[c];
  }
}

}  // namespace

void add_fold(const FoldGrams& fold, const double* smallest_pivot, std::size_t n_responses,
              const ColumnScores& scores) {
  invert_pivots(fold.training, smallest_pivot, scores);
  const double* inverse = scores.inverse;
  const double* v_diagonal = fold.validation.diagonal;
  for (std::size_t r = 0; r < n_responses; ++r) {
    const double* a = fold.training.responses + r * fold.training.stride;
    const double* v = fold.validation.responses + r * fold.validation.stride;
    const double v_own = fold.validation.own[r];
    double* cv_sse = scores.cv_sse + r * scores.stride;
    FORMSIEVE_INDEPENDENT
    for (std::size_t c = scores.first; c < scores.last; ++c) {
      const double m = a[c] * inverse[c];
      cv_sse[c] += v_own + m * (m * v_diagonal[c] - 2.0 * v[c]);
    }
  }
}

void set_rss(const Half& all, const double* smallest_pivot, std::size_t n_responses, const ColumnScores& scores) {
  invert_pivots(all, smallest_pivot, scores);
  const double* inverse = scores.inverse;
  for (std::size_t r = 0; r < n_responses; ++r) {
    const double* a = all.responses + r * all.stride;
    const double own = all.own[r];
    double* rss = scores.rss + r * scores.stride;
    FORMSIEVE_INDEPENDENT
    for (std::size_t c = scores.first; c < scores.last; ++c) rss[c] = own - a[c] * a[c] * inverse[c];
  }
}

namespace {

/// The pivot rows of A and V and what they are divided by.
struct Pivot {
  const double* a;
  const double* v;
  double inverse;   ///< 1 / A_cc
  double half_own;  ///< ½ V_cc
};

/// Computes m and t of the open columns and, since both are at hand, the child's diagonals.
void eliminate_diagonals(const Pivot& pivot, std::size_t n_open, const FoldGrams& parent, const FoldGrams& child,
                         double* m, double* t) {
  const auto [a, v, inverse, half_own] = pivot;
  const double* a_from = parent.training.diagonal;
  const double* v_from = parent.validation.diagonal;
  double* a_to = child.training.diagonal;
  double* v_to = child.validation.diagonal;
  FORMSIEVE_INDEPENDENT
  for (std::size_t k = 0; k < n_open; ++k) {
    const double m_k = a[k] * inverse;
    const double t_k = v[k] - half_own * m_k;
    m[k] = m_k;
    t[k] = t_k;
    a_to[k] = a_from[k] - m_k * a[k];
    v_to[k] = v_from[k] - 2.0 * m_k * t_k;
  }
}

void eliminate_response(const Pivot& pivot, std::size_t c, std::size_t r, std::size_t n_open, const FoldGrams& parent,
                        const FoldGrams& child, const double* m, const double* t) {
  const double* a = pivot.a;
  const double* a_from = parent.training.responses + r * parent.training.stride;
  const double* v_from = parent.validation.responses + r * parent.validation.stride;
  double* a_to = child.training.responses + r * child.training.stride;
  double* v_to = child.validation.responses + r * child.validation.stride;
  const double m_r = a_from[c] * pivot.inverse;
  const double t_r = v_from[c] - pivot.half_own * m_r;
  FORMSIEVE_INDEPENDENT
  for (std::size_t k = 0; k < n_open; ++k) {
    a_to[k] = a_from[k] - m_r * a[k];
    v_to[k] = v_from[k] - (m_r * t[k] + t_r * m[k]);
  }
  child.training.own[r] = parent.training.own[r] - m_r * a_from[c];
  child.validation.own[r] = parent.validation.own[r] - 2.0 * m_r * t_r;
}

void eliminate_row(const Pivot& pivot, std::size_t offset, std::size_t length, double m_i, double t_i,
                   const FoldGrams& parent, const FoldGrams& child, const double* m, const double* t) {
  const double* a = pivot.a;
  const double* a_from = parent.training.rows + offset;
  const double* v_from = parent.validation.rows + offset;
  double* a_to = child.training.rows + offset;
  double* v_to = child.validation.rows + offset;
  FORMSIEVE_INDEPENDENT
  for (std::size_t k = 0; k < length; ++k) {
    a_to[k] = a_from[k] - m_i * a[k];
    v_to[k] = v_from[k] - (m_i * t[k] + t_i * m[k]);
  }
}

}  // namespace

void eliminate_fold(const Tree& tree, std::size_t c, std::size_t first_row, std::size_t n_open, const FoldGrams& parent,
                    const FoldGrams& child, Multipliers& multipliers) {
  const std::size_t* offset = tree.row_offset().data();
  const std::size_t* length = tree.row_length().data();
  const Pivot pivot{parent.training.rows + offset[c], parent.validation.rows + offset[c],
                    1.0 / parent.training.diagonal[c], 0.5 * parent.validation.diagonal[c]};
  double* m = multipliers.m.data();
  double* t = multipliers.t.data();
  eliminate_diagonals(pivot, n_open, parent, child, m, t);
  for (std::size_t r = 0; r < tree.n_responses(); ++r) eliminate_response(pivot, c, r, n_open, parent, child, m, t);
  for (std::size_t i = first_row; i < n_open; ++i)
    eliminate_row(pivot, offset[i], length[i], m[i], t[i], parent, child, m, t);
}

void eliminate_all_rows(const Tree& tree, std::size_t c, std::size_t first_row, std::size_t n_open, const Half& parent,
                        const Half& child, Multipliers& multipliers) {
  const std::size_t* offset = tree.row_offset().data();
  const double* a = parent.rows + offset[c];
  const double inverse = 1.0 / parent.diagonal[c];
  double* m = multipliers.m.data();
  const double* diagonal = parent.diagonal;
  double* child_diagonal = child.diagonal;
  FORMSIEVE_INDEPENDENT
  for (std::size_t k = 0; k < n_open; ++k) {
    m[k] = a[k] * inverse;
    child_diagonal[k] = diagonal[k] - m[k] * a[k];
  }
  for (std::size_t r = 0; r < tree.n_responses(); ++r) {
    const double* from = parent.responses + r * parent.stride;
    double* to = child.responses + r * child.stride;
    const double m_r = from[c] * inverse;
    FORMSIEVE_INDEPENDENT
    for (std::size_t k = 0; k < n_open; ++k) to[k] = from[k] - m_r * a[k];
    child.own[r] = parent.own[r] - m_r * from[c];
  }
  for (std::size_t i = first_row; i < n_open; ++i) {
    const double* from = parent.rows + offset[i];
    double* to = child.rows + offset[i];
    const std::size_t length = tree.row_length()[i];
    const double m_i = m[i];
    FORMSIEVE_INDEPENDENT
    for (std::size_t k = 0; k < length; ++k) to[k] = from[k] - m_i * a[k];
  }
}

}  // namespace formsieve::plain

// The arithmetic of one column, and of one pair of columns, in one fold; the head of pair_kernel.hpp has the formulas.
// Compiled once for each instruction set: no include guard of the usual kind.
#if defined(FORMSIEVE_PAIR_ARITHMETIC_HPP) == defined(HWY_TARGET_TOGGLE)
#ifdef FORMSIEVE_PAIR_ARITHMETIC_HPP
#undef FORMSIEVE_PAIR_ARITHMETIC_HPP
#else
#define FORMSIEVE_PAIR_ARITHMETIC_HPP
#endif

#include "search/pair_vectors-inl.hpp"

HWY_BEFORE_NAMESPACE();
namespace formsieve::search::HWY_NAMESPACE {
namespace {

/// The column that is brought in, in one fold.
template <int R>
struct Pivot {
  using F = FoldFields<R>;
  /// `rows`: of the fold.
  HWY_INLINE Pivot(const double* fold, const double* rows, std::size_t row_offset, std::size_t lane)
      : row(rows + row_offset),
        inverse(all(fold[F::inverse(lane)])),
        v(all(fold[F::v(lane)])),
        two_v(all(2.0 * fold[F::v(lane)])) {
    for (int r = 0; r < R; ++r) {
      my[r] = all(fold[F::my(static_cast<std::size_t>(r), lane)]);
      hy[r] = all(fold[F::hy(static_cast<std::size_t>(r), lane)]);
    }
  }
  const double* row;
  Vector inverse, v, two_v;
  Vector my[R], hy[R];
};

/// A vector of open columns after the pivot.
template <int R>
struct Open {
  using F = FoldFields<R>;
  HWY_INLINE Open(const Pivot<R>& pivot, const double* fold, std::size_t lane)
      : a_pivot(load(pivot.row + in_row(lane))),
        u_pivot(load(pivot.row + in_row(lane) + kLanes)),
        m(hn::Mul(a_pivot, pivot.inverse)) {
    const Vector t = hn::MulSub(m, pivot.v, u_pivot);
    a = hn::NegMulAdd(m, a_pivot, load(fold + F::a(lane)));
    v = hn::MulAdd(m, t, load(fold + F::v(lane)));
    for (int r = 0; r < R; ++r) {
      const auto i = static_cast<std::size_t>(r);
      ya[r] = hn::NegMulAdd(pivot.my[r], a_pivot, load(fold + F::ya(i, lane)));
      yu[r] = hn::NegMulAdd(m, pivot.hy[r], hn::NegMulAdd(pivot.my[r], u_pivot, load(fold + F::yu(i, lane))));
    }
  }
  HWY_INLINE Vector h(const Pivot<R>& pivot) const { return hn::NegMulAdd(m, pivot.two_v, u_pivot); }

  Vector a_pivot, u_pivot, m, a, v;
  Vector ya[R], yu[R];
};

/// Columns after the pivot as rows of pairs: what is broadcast.
struct Derived {
  Vector my, hy, change;
};
HWY_INLINE Derived derive(Vector ya, Vector yu, Vector v, Vector inverse) {
  const Vector my = hn::Mul(ya, inverse);
  const Vector my_v = hn::Mul(my, v);
  return {my, hn::NegMulAdd(all(2.0), my_v, yu), hn::Mul(my, hn::Sub(my_v, yu))};
}

/// A pair in one fold: what row a does to the columns b, and the change of the held-out SSE by b after a.
template <int R, class RowOf>
HWY_INLINE void add_pair(Vector ra, Vector ua, Vector inverse_a, Vector v_a, const RowOf& my_a, const RowOf& hy_a,
                         Vector a_b, Vector v_b, const Vector (&ya_b)[R], const Vector (&yu_b)[R], Vector& smallest,
                         Vector* sum) {
  const Vector m = hn::Mul(ra, inverse_a);
  const Vector d = hn::NegMulAdd(m, ra, a_b);
  const Vector v = hn::MulAdd(m, hn::MulSub(m, v_a, ua), v_b);
  smallest = smaller(d, smallest);
  const Vector inverse = reciprocal(d);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector b = hn::NegMulAdd(my_a(r), ra, ya_b[r]);
    const Vector beta = hn::Mul(b, inverse);
    const Vector u = hn::NegMulAdd(m, hy_a(r), hn::NegMulAdd(my_a(r), ua, yu_b[r]));
    sum[r] = hn::MulAdd(beta, hn::MulSub(beta, v, u), sum[r]);
  }
}

/// A pair in the matrix of all rows.
template <int R, class RowOf>
HWY_INLINE void pair_rss(Vector ra, Vector inverse_a, const RowOf& my_a, Vector a_b, const Vector (&ya_b)[R],
                         Vector& smallest, Vector (&rss)[R]) {
  const Vector d = hn::NegMulAdd(hn::Mul(ra, inverse_a), ra, a_b);
  smallest = smaller(d, smallest);
  const Vector inverse = reciprocal(d);
  for (std::size_t r = 0; r < R; ++r) {
    const Vector b = hn::NegMulAdd(my_a(r), ra, ya_b[r]);
    rss[r] = hn::NegMulAdd(R > 1 ? hn::Mul(b, inverse) : hn::Div(b, d), b, rss[r]);
  }
}

}  // namespace
}  // namespace formsieve::search::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#endif

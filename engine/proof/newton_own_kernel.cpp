#include "proof/newton_kernel.hpp"

#include "base/simd_targets.hpp"

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "proof/newton_own_kernel.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::proof::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kLineLanes>;
using Vector = hn::Vec<Tag>;

constexpr std::size_t kLanes = HWY_MIN(kLineLanes, HWY_MAX_BYTES / sizeof(double));

/// Part of a line that one vector holds: lanes from `part`.
HWY_INLINE Vector load(const Line& line, std::size_t part) { return hn::Load(Tag(), line.at + part); }
HWY_INLINE void store(Vector value, Line& line, std::size_t part) { hn::Store(value, Tag(), line.at + part); }
HWY_INLINE Vector set(double value) { return hn::Set(Tag(), value); }
HWY_INLINE double sum_of_lanes(Vector value) { return hn::GetLane(hn::SumOfLanes(Tag(), value)); }

double multiply_group(const LaneGroup& group, double mu, double lambda, const Line* HWY_RESTRICT in,
                      Line* HWY_RESTRICT out) {
  const std::size_t n = group.n_variables(), u = group.n_entries();
  Vector to_lambda = hn::Zero(Tag());
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    for (std::size_t i = 0; i < n; ++i) store(hn::Zero(Tag()), out[i], part);
    store(hn::Mul(load(group.u_curvature, part), load(in[u], part)), out[u], part);
    for (std::size_t row = 0; row < group.n_rows; ++row) {
      const Line* HWY_RESTRICT jacobian = group.jacobian.data() + row * n;
      const Vector by_lambda = load(group.by_lambda[row], part);
      Vector even = hn::Mul(by_lambda, set(lambda)), odd = hn::Zero(Tag());
      std::size_t i = 0;
      for (; i + 2 <= n; i += 2) {
        even = hn::MulAdd(load(jacobian[i], part), load(in[i], part), even);
        odd = hn::MulAdd(load(jacobian[i + 1], part), load(in[i + 1], part), odd);
      }
      if (i < n) even = hn::MulAdd(load(jacobian[i], part), load(in[i], part), even);
      const Vector value = hn::Mul(hn::Add(even, odd), set(mu));
      for (i = 0; i < n; ++i) store(hn::MulAdd(value, load(jacobian[i], part), load(out[i], part)), out[i], part);
      to_lambda = hn::MulAdd(value, by_lambda, to_lambda);
    }
  }
  return sum_of_lanes(to_lambda);
}

/// Σ over the rows of the Jacobian of column i times column k; column n_variables() stands for λ.
HWY_INLINE Vector column_product(const LaneGroup& group, std::size_t i, std::size_t k, std::size_t part) {
  const std::size_t n = group.n_variables();
  const auto at = [&](std::size_t row, std::size_t column) HWY_ATTR {
    return load(column < n ? group.jacobian[row * n + column] : group.by_lambda[row], part);
  };
  Vector sum = hn::Zero(Tag());
  for (std::size_t row = 0; row < group.n_rows; ++row) sum = hn::MulAdd(at(row, i), at(row, k), sum);
  return sum;
}

void fill_own(LaneGroup& group, double mu, std::size_t part) {
  const std::size_t n = group.n_own(), rest = group.n_columns + 1;
  for (std::size_t i = 0; i < n; ++i) {
    for (std::size_t k = 0; k <= i; ++k)
      store(hn::Mul(column_product(group, i, k, part), set(mu)), group.own[lower_index(i, k)], part);
    Line& diagonal = group.own[lower_index(i, i)];
    store(hn::Add(load(diagonal, part), i + 1 < n ? set(mu) : load(group.u_curvature, part)), diagonal, part);
    for (std::size_t k = 0; k < rest; ++k)
      store(hn::Mul(column_product(group, i, n + k, part), set(mu)), group.coupling[i * rest + k], part);
  }
}

/// Cholesky's method in every lane; the diagonal of the factor holds 1 / its pivots' roots.
bool factor_own(LaneGroup& group, std::size_t part) {
  auto positive = hn::Eq(hn::Zero(Tag()), hn::Zero(Tag()));
  for (std::size_t i = 0; i < group.n_own(); ++i) {
    Line* HWY_RESTRICT row = group.own.data() + lower_index(i, 0);
    Vector pivot = load(row[i], part);
    for (std::size_t k = 0; k < i; ++k) {
      const Line* HWY_RESTRICT other = group.own.data() + lower_index(k, 0);
      Vector sum = load(row[k], part);
      for (std::size_t l = 0; l < k; ++l) sum = hn::NegMulAdd(load(row[l], part), load(other[l], part), sum);
      sum = hn::Mul(sum, load(other[k], part));
      pivot = hn::NegMulAdd(sum, sum, pivot);
      store(sum, row[k], part);
    }
    positive = hn::And(positive, hn::Gt(pivot, hn::Zero(Tag())));
    store(hn::Div(set(1.0), hn::Sqrt(pivot)), row[i], part);
  }
  return hn::AllTrue(Tag(), positive);
}

/// coupling ← L⁻¹ coupling, and schur.
void fill_rest(LaneGroup& group, double mu, std::size_t part) {
  const std::size_t n = group.n_own(), rest = group.n_columns + 1;
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t k = 0; k < rest; ++k) {
      Vector sum = load(group.coupling[i * rest + k], part);
      for (std::size_t l = 0; l < i; ++l)
        sum = hn::NegMulAdd(load(group.own[lower_index(i, l)], part), load(group.coupling[l * rest + k], part), sum);
      store(hn::Mul(sum, load(group.own[lower_index(i, i)], part)), group.coupling[i * rest + k], part);
    }
  for (std::size_t i = 0; i < rest; ++i)
    for (std::size_t k = 0; k <= i; ++k) {
      Vector sum = hn::Mul(column_product(group, n + i, n + k, part), set(mu));
      for (std::size_t l = 0; l < n; ++l)
        sum = hn::NegMulAdd(load(group.coupling[l * rest + i], part), load(group.coupling[l * rest + k], part), sum);
      store(sum, group.schur[lower_index(i, k)], part);
    }
}

bool eliminate_group(LaneGroup& group, double mu) {
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    fill_own(group, mu, part);
    if (!factor_own(group, part)) return false;
    fill_rest(group, mu, part);
  }
  return true;
}

void forward_group(const LaneGroup& group, const Line* in, Line* HWY_RESTRICT out, Line* HWY_RESTRICT rest) {
  const std::size_t n = group.n_own(), n_rest = group.n_columns + 1;
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    for (std::size_t k = 0; k < n_rest; ++k) store(hn::Zero(Tag()), rest[k], part);
    for (std::size_t i = 0; i < n; ++i) {
      const Line* HWY_RESTRICT row = group.own.data() + lower_index(i, 0);
      Vector even = load(in[i], part), odd = hn::Zero(Tag());
      std::size_t l = 0;
      for (; l + 2 <= i; l += 2) {
        even = hn::NegMulAdd(load(row[l], part), load(out[l], part), even);
        odd = hn::NegMulAdd(load(row[l + 1], part), load(out[l + 1], part), odd);
      }
      if (l < i) even = hn::NegMulAdd(load(row[l], part), load(out[l], part), even);
      const Vector value = hn::Mul(hn::Add(even, odd), load(row[i], part));
      store(value, out[i], part);
      for (std::size_t k = 0; k < n_rest; ++k)
        store(hn::MulAdd(load(group.coupling[i * n_rest + k], part), value, load(rest[k], part)), rest[k], part);
    }
  }
}

void backward_group(const LaneGroup& group, const Line* HWY_RESTRICT rest, Line* HWY_RESTRICT out) {
  const std::size_t n = group.n_own(), n_rest = group.n_columns + 1;
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    for (std::size_t i = 0; i < n; ++i) {
      Vector sum = load(out[i], part);
      for (std::size_t k = 0; k < n_rest; ++k)
        sum = hn::NegMulAdd(load(group.coupling[i * n_rest + k], part), load(rest[k], part), sum);
      store(sum, out[i], part);
    }
    for (std::size_t i = n; i-- > 0;) {
      const Line* HWY_RESTRICT row = group.own.data() + lower_index(i, 0);
      const Vector value = hn::Mul(load(out[i], part), load(row[i], part));
      store(value, out[i], part);
      for (std::size_t l = 0; l < i; ++l)
        store(hn::NegMulAdd(load(row[l], part), value, load(out[l], part)), out[l], part);
    }
  }
}

double dot_lines(const Line* HWY_RESTRICT left, const Line* HWY_RESTRICT right, std::size_t n) {
  Vector even = hn::Zero(Tag()), odd = hn::Zero(Tag());
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    std::size_t i = 0;
    for (; i + 2 <= n; i += 2) {
      even = hn::MulAdd(load(left[i], part), load(right[i], part), even);
      odd = hn::MulAdd(load(left[i + 1], part), load(right[i + 1], part), odd);
    }
    if (i < n) even = hn::MulAdd(load(left[i], part), load(right[i], part), even);
  }
  return sum_of_lanes(hn::Add(even, odd));
}

void add_lines(const Line* HWY_RESTRICT from, double factor, Line* HWY_RESTRICT to, std::size_t n) {
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t part = 0; part < kLineLanes; part += kLanes)
      store(hn::MulAdd(load(from[i], part), set(factor), load(to[i], part)), to[i], part);
}

}  // namespace formsieve::proof::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::proof {

HWY_EXPORT(multiply_group);
HWY_EXPORT(eliminate_group);
HWY_EXPORT(forward_group);
HWY_EXPORT(backward_group);
HWY_EXPORT(dot_lines);
HWY_EXPORT(add_lines);

double multiply_own(const LaneGroup& group, double mu, double lambda, const Line* in, Line* out) {
  return HWY_DYNAMIC_DISPATCH(multiply_group)(group, mu, lambda, in, out);
}

bool eliminate_own(LaneGroup& group, double mu) { return HWY_DYNAMIC_DISPATCH(eliminate_group)(group, mu); }

void forward_own(const LaneGroup& group, const Line* in, Line* out, Line* rest) {
  HWY_DYNAMIC_DISPATCH(forward_group)(group, in, out, rest);
}

void backward_own(const LaneGroup& group, const Line* rest, Line* out) {
  HWY_DYNAMIC_DISPATCH(backward_group)(group, rest, out);
}

double dot(const Lines& left, const Lines& right) {
  return HWY_DYNAMIC_DISPATCH(dot_lines)(left.data(), right.data(), left.size());
}

void add_multiple(const Lines& from, double factor, Lines& to) {
  HWY_DYNAMIC_DISPATCH(add_lines)(from.data(), factor, to.data(), from.size());
}

}  // namespace formsieve::proof
#endif

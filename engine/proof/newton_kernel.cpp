#include "proof/newton_kernel.hpp"

#include "base/simd_targets.hpp"

#include <algorithm>
#include <numbers>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "proof/newton_kernel.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::proof::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

using Tag = hn::CappedTag<double, kLineLanes>;
using Vector = hn::Vec<Tag>;

constexpr std::size_t kLanes = HWY_MIN(kLineLanes, HWY_MAX_BYTES / sizeof(double));
constexpr double kRoot2 = std::numbers::sqrt2;

/// Part of a line that one vector holds: lanes from `part`.
HWY_INLINE Vector load(const Line& line, std::size_t part) { return hn::Load(Tag(), line.at + part); }
HWY_INLINE void store(Vector value, Line& line, std::size_t part) { hn::Store(value, Tag(), line.at + part); }
HWY_INLINE Vector set(double value) { return hn::Set(Tag(), value); }
HWY_INLINE double sum_of_lanes(Vector value) { return hn::GetLane(hn::SumOfLanes(Tag(), value)); }

/// One predictor's blocks with the groups of a class, the D̃ (√2 taken out) and w of these groups.
struct BlocksView {
  const Line* blocks;
  std::size_t n_rows;  ///< columns of the predictor
  std::size_t n_groups, n_columns;
  const Line* d;  ///< [group][column][row]
  const Line* w;  ///< first group's
  std::size_t w_step;
  Line* work;  ///< [group][column][row of two]

  const Line* row(std::size_t g, std::size_t i) const { return blocks + (g * n_rows + i) * n_columns; }
};

/// work ← kRows rows of A_j· from `row` times D̃, group by group; sums ← these rows times w. Two rows share what is
/// loaded of D̃.
template <std::size_t kColumns, std::size_t kRows>
HWY_INLINE void multiply_rows(const BlocksView& view, std::size_t row, double* HWY_RESTRICT sums) {
  const std::size_t q = kColumns > 0 ? kColumns : view.n_columns;
  constexpr std::size_t kKept = kColumns > 0 ? kColumns : 1;  // entries of a row in registers
  Vector by_w[kRows];
  for (Vector& sum : by_w) sum = hn::Zero(Tag());
  for (std::size_t g = 0; g < view.n_groups; ++g) {
    const Line* HWY_RESTRICT left = view.row(g, row);
    const Line* HWY_RESTRICT w = view.w + g * view.w_step;
    for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
      Vector kept[kRows][kKept];
      for (std::size_t r = 0; r < kRows; ++r)
        for (std::size_t i = 0; i < kKept; ++i) kept[r][i] = load(left[r * q + i], part);
      const auto entry = [&](std::size_t r, std::size_t i)
                             HWY_ATTR { return kColumns > 0 ? kept[r][i] : load(left[r * q + i], part); };
      for (std::size_t r = 0; r < kRows; ++r)
        for (std::size_t i = 0; i < q; ++i) by_w[r] = hn::MulAdd(entry(r, i), load(w[i], part), by_w[r]);
      const Line* HWY_RESTRICT d = view.d + g * q * q;
      Line* HWY_RESTRICT out = view.work + g * q * kRows;
      for (std::size_t k = 0; k < q; ++k, d += q, out += kRows) {
        Vector product[kRows];
        for (Vector& each : product) each = hn::Zero(Tag());
        for (std::size_t i = 0; i < q; ++i)
          for (std::size_t r = 0; r < kRows; ++r) product[r] = hn::MulAdd(entry(r, i), load(d[i], part), product[r]);
        for (std::size_t r = 0; r < kRows; ++r) store(product[r], out[r], part);
      }
    }
  }
  for (std::size_t r = 0; r < kRows; ++r) sums[r] = sum_of_lanes(by_w[r]);
}

/// products[r][o] ← Σ over the groups of row r of work times row `other` + o of A_j·.
template <std::size_t kColumns, std::size_t kRows, std::size_t kOthers>
HWY_INLINE void multiply_pairs(const BlocksView& view, std::size_t other, double (&products)[2][2]) {
  const std::size_t q = kColumns > 0 ? kColumns : view.n_columns;
  Vector sum[kRows][kOthers];
  for (auto& row : sum)
    for (Vector& each : row) each = hn::Zero(Tag());
  for (std::size_t g = 0; g < view.n_groups; ++g) {
    const Line* HWY_RESTRICT right = view.row(g, other);
    const Line* HWY_RESTRICT left = view.work + g * q * kRows;
    for (std::size_t part = 0; part < kLineLanes; part += kLanes)
      for (std::size_t k = 0; k < q; ++k)
        for (std::size_t o = 0; o < kOthers; ++o)
          for (std::size_t r = 0; r < kRows; ++r)
            sum[r][o] = hn::MulAdd(load(left[k * kRows + r], part), load(right[o * q + k], part), sum[r][o]);
  }
  for (std::size_t r = 0; r < kRows; ++r)
    for (std::size_t o = 0; o < kOthers; ++o) products[r][o] = sum_of_lanes(sum[r][o]);
}

/// Where what belongs to one predictor goes: its group's variables, its lane.
struct PredictorOut {
  Line* lines;
  std::size_t lane, order;  ///< q of the group

  HWY_INLINE void add_d(std::size_t row, std::size_t other, double value) const {
    if (other <= row) lines[upper_index(other, row, order)].at[lane] += other < row ? kRoot2 * value : value;
  }
  HWY_INLINE void add_w(std::size_t row, double value) const {
    lines[order * (order + 1) / 2 + 1 + row].at[lane] += value;
  }
};

template <std::size_t kColumns, std::size_t kRows>
HWY_INLINE void multiply_with_rows(const BlocksView& view, double mu, std::size_t row, const PredictorOut& out) {
  double sums[kRows], products[2][2];
  multiply_rows<kColumns, kRows>(view, row, sums);
  for (std::size_t r = 0; r < kRows; ++r) out.add_w(row + r, 2.0 * sums[r]);
  for (std::size_t other = 0; other < row + kRows; other += 2) {
    const bool two = other + 1 < row + kRows;
    if (two)
      multiply_pairs<kColumns, kRows, 2>(view, other, products);
    else
      multiply_pairs<kColumns, kRows, 1>(view, other, products);
    for (std::size_t r = 0; r < kRows; ++r)
      for (std::size_t o = 0; o < (two ? 2 : 1); ++o) out.add_d(row + r, other + o, mu * products[r][o]);
  }
}

/// Adds (A D̃ A)_jj and (A w)_j.
template <std::size_t kColumns>
void multiply_predictor(const BlocksView& view, double mu, const PredictorOut& out) {
  std::size_t row = 0;
  for (; row + 2 <= view.n_rows; row += 2) multiply_with_rows<kColumns, 2>(view, mu, row, out);
  if (row < view.n_rows) multiply_with_rows<kColumns, 1>(view, mu, row, out);
}

using MultiplyPredictor = void (*)(const BlocksView&, double, const PredictorOut&);

MultiplyPredictor multiply_of(std::size_t n_columns) {
  switch (n_columns) {
    case 1:
      return multiply_predictor<1>;
    case 2:
      return multiply_predictor<2>;
    case 3:
      return multiply_predictor<3>;
    case 4:
      return multiply_predictor<4>;
    case 5:
      return multiply_predictor<5>;
    case 6:
      return multiply_predictor<6>;
    case 7:
      return multiply_predictor<7>;
    case 8:
      return multiply_predictor<8>;
    default:
      return multiply_predictor<0>;
  }
}

/// The whole D̃ of a class of groups, without their √2.
void unpack(const Lanes& lanes, const LaneClass& of, const Line* in, Line* HWY_RESTRICT out) {
  const std::size_t q = of.n_columns;
  for (std::size_t g = of.first_group; g < of.first_group + of.n_groups; ++g, out += q * q) {
    const Line* HWY_RESTRICT entry = in + lanes.groups()[g].first;
    for (std::size_t i = 0; i < q; ++i)
      for (std::size_t k = i; k < q; ++k, ++entry)
        for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
          const Vector value = hn::Mul(load(*entry, part), set(i == k ? 1.0 : 1.0 / kRoot2));
          store(value, out[i * q + k], part);
          store(value, out[k * q + i], part);
        }
  }
}

void multiply_all_blocks(const Lanes& lanes, double mu, const Line* in, Line* out, Line* work) {
  for (const LaneClass& of : lanes.classes()) {
    const LaneGroup& first = lanes.groups()[of.first_group];
    Line* const products = work + of.n_groups * of.n_columns * of.n_columns;
    unpack(lanes, of, in, work);
    const MultiplyPredictor multiply = multiply_of(of.n_columns);
    for (std::size_t j = 0; j < lanes.places().size(); ++j) {
      const LanePlace& place = lanes.places()[j];
      const LaneGroup& group = lanes.groups()[place.group];
      const BlocksView view{lanes.block(j, of.first_group),
                            place.n_columns,
                            of.n_groups,
                            of.n_columns,
                            work,
                            in + first.w_line(),
                            first.n_variables(),
                            products};
      multiply(view, mu, {out + group.first, place.lane, group.n_columns});
    }
  }
}

/// work ← block · R, block ← R_jᵀ work; R_j stands in one lane of its group's basis.
void change_block(const LaneGroup& own_group, std::size_t lane, std::size_t n_rows, const LaneGroup& group,
                  Line* HWY_RESTRICT block, Line* HWY_RESTRICT work) {
  const std::size_t q = group.n_columns;
  for (std::size_t part = 0; part < kLineLanes; part += kLanes) {
    for (std::size_t row = 0; row < n_rows; ++row)
      for (std::size_t k = 0; k < q; ++k) {
        Vector sum = hn::Zero(Tag());
        for (std::size_t i = 0; i <= k; ++i)
          sum = hn::MulAdd(load(block[row * q + i], part), load(group.basis[i * q + k], part), sum);
        store(sum, work[row * q + k], part);
      }
    for (std::size_t row = 0; row < n_rows; ++row)
      for (std::size_t k = 0; k < q; ++k) {
        Vector sum = hn::Zero(Tag());
        for (std::size_t i = 0; i <= row; ++i)
          sum = hn::MulAdd(load(work[i * q + k], part), set(own_group.basis[i * own_group.n_columns + row].at[lane]),
                           sum);
        store(sum, block[row * q + k], part);
      }
  }
}

void change_blocks(Lanes& lanes, std::size_t predictor, Line* work) {
  const LanePlace& place = lanes.places()[predictor];
  for (std::size_t g = 0; g < lanes.groups().size(); ++g)
    change_block(lanes.groups()[place.group], place.lane, place.n_columns, lanes.groups()[g], lanes.block(predictor, g),
                 work);
}

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

HWY_EXPORT(change_blocks);
HWY_EXPORT(multiply_all_blocks);
HWY_EXPORT(multiply_group);
HWY_EXPORT(eliminate_group);
HWY_EXPORT(forward_group);
HWY_EXPORT(backward_group);
HWY_EXPORT(dot_lines);
HWY_EXPORT(add_lines);

void change_basis(Lanes& lanes, std::size_t predictor, Line* work) {
  HWY_DYNAMIC_DISPATCH(change_blocks)(lanes, predictor, work);
}

void multiply_blocks(const Lanes& lanes, double mu, const Line* in, Line* out, Line* work) {
  HWY_DYNAMIC_DISPATCH(multiply_all_blocks)(lanes, mu, in, out, work);
}

std::size_t kernel_work(const Lanes& lanes) {
  std::size_t entries = 0, columns = 0, most = 0;
  for (const LaneGroup& group : lanes.groups()) {
    entries += group.n_columns * group.n_columns;
    columns += 2 * group.n_columns;
    most = std::max(most, group.n_columns * group.n_columns);
  }
  return std::max(entries + columns, lanes.groups().empty() ? most : lanes.groups().front().n_columns * most);
}

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

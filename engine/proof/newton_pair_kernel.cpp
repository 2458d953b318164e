#include "proof/newton_kernel.hpp"

#include "base/simd_targets.hpp"

#include <algorithm>
#include <numbers>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "proof/newton_pair_kernel.cpp"
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

}  // namespace formsieve::proof::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::proof {

HWY_EXPORT(change_blocks);
HWY_EXPORT(multiply_all_blocks);

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

}  // namespace formsieve::proof
#endif

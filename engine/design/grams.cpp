#include "base/gram.hpp"
#include "base/parallel.hpp"
#include "base/sums.hpp"
#include "design/design.hpp"
#include "design/moments.hpp"
#include "design/parts.hpp"
#include "design/standardise.hpp"

#include <algorithm>
#include <cassert>
#include <optional>
#include <utility>

namespace formsieve::design {

namespace {

/// A column is constant on the training rows when its sum of squares about their mean is below this share of that about
/// the mean of all rows: its spread there is then 1e-7 of its distance from the rows held out, and the roundings of the
/// standardised values are more than 1e-9 of it.
constexpr double kConstantInFold_rel = 1e-14;

/// Sums over the rows of one fold.
struct FoldMoments {
  Moments weighted;
  Moments plain;  ///< without weights; empty when there are none, since then it would be the same
};

FoldMoments sum_rows(const Data& data, const StandardColumns& columns, const std::vector<std::uint32_t>& rows,
                     PartWorkspace& workspace) {
  FoldMoments sums;
  workspace.values.resize(columns.order() * base::kRowChunk);
  for (std::size_t first = 0; first < rows.size(); first += base::kRowChunk) {
    const auto chunk = std::span(rows).subspan(first, std::min(base::kRowChunk, rows.size() - first));
    columns.evaluate(data, chunk, workspace.values);
    const RowBlock block{chunk.size(), columns.order(), workspace.values.data()};
    workspace.weights.clear();
    if (!data.weights.empty()) {
      for (const std::uint32_t row : chunk) workspace.weights.push_back(data.weights[row]);
      add_block(sums.plain, block, {}, workspace.block);
    }
    add_block(sums.weighted, block, workspace.weights, workspace.block);
  }
  mirror(sums.plain);
  mirror(sums.weighted);
  return sums;
}

std::vector<FoldMoments> sum_folds(const Data& data, const StandardColumns& columns,
                                   const std::vector<std::uint32_t>& fold_of, std::size_t n_folds, unsigned threads) {
  const std::vector<Part> parts = cut(fold_of, n_folds);
  std::vector<FoldMoments> sums(parts.size());
  const std::vector<std::size_t> order = working_order(parts);
  PartWorkspaces workspaces;
  base::parallel_for(parts.size(), threads, [&](std::size_t i) {
    const std::size_t p = order[i];
    auto workspace = workspaces.take();
    sums[p] = sum_rows(data, columns, parts[p].rows, *workspace);
    workspaces.give_back(std::move(workspace));
  });
  std::vector<FoldMoments> folds(n_folds);
  std::size_t p = 0;
  for (std::size_t fold = 0; fold < n_folds; ++fold) {
    std::vector<Moments> weighted;
    std::vector<Moments> plain;
    for (; p < parts.size() && parts[p].fold == fold; ++p) {
      weighted.push_back(std::move(sums[p].weighted));
      plain.push_back(std::move(sums[p].plain));
    }
    folds[fold] = {join_all(std::move(weighted)), join_all(std::move(plain))};
  }
  return folds;
}

/// Sets to zero the rows and columns of what is constant on the training rows, where only roundings stand.
void clear_constant_columns(Moments& training) {
  const std::size_t order = training.order();
  for (std::size_t c = 0; c < order; ++c) {
    const double about_mean = training.cross[c * (order + 1)];
    const double about_zero = about_mean + training.weight * training.mean[c] * training.mean[c];
    if (about_mean > kConstantInFold_rel * about_zero) continue;
    for (std::size_t i = 0; i < order; ++i) training.cross[i + c * order] = training.cross[c + i * order] = 0.0;
  }
}

/// Cross-products of the held-out rows, unweighted, about the training means.
std::vector<double> validation_gram(const Moments& held_out, const Moments& training) {
  std::vector<double> d(held_out.order());
  for (std::size_t c = 0; c < d.size(); ++c) d[c] = held_out.mean[c] - training.mean[c];
  std::vector<double> gram = held_out.cross;
  add_outer_product(gram, held_out.weight, d);
  return gram;
}

/// Training and validation matrices of one repeat. The training rows of a fold are those of the folds before it and
/// those of the folds after it, joined: nothing is ever subtracted from a total.
void add_repeat(std::vector<FoldMoments> folds, base::GramSet& set) {
  std::vector<Moments> after(folds.size() + 1);
  for (std::size_t f = folds.size(); f-- > 0;) {
    after[f] = after[f + 1];
    join(after[f], folds[f].weighted);
  }
  if (set.all.empty()) set.all = after.front().cross;
  Moments before;
  for (std::size_t f = 0; f < folds.size(); ++f) {
    Moments training = before;
    join(training, after[f + 1]);
    const Moments& held_out = folds[f].plain.order() > 0 ? folds[f].plain : folds[f].weighted;
    set.validation.push_back(validation_gram(held_out, training));
    clear_constant_columns(training);
    set.training.push_back(std::move(training.cross));
    join(before, folds[f].weighted);
  }
}

/// The sums of every fold of one repeat, standardised.
class FoldSums {
 public:
  /// Finds the maps on the way: from the first repeat's sums, or by passes of its own where those will not do.
  static Result<FoldSums> start(const Data& data, const Folds& folds, unsigned threads) {
    auto columns = StandardColumns::provisional(data, threads);
    if (!columns) return columns.error();
    FoldSums result(data, folds, threads);
    result.columns_ = std::move(*columns);
    result.first_ = result.sum(0);
    result.scales_ = result.columns_.remaining_scales(total(result.first_));
    if (result.scales_) return result;
    auto exact = StandardColumns::fit(data, threads);
    if (!exact) return exact.error();
    result.columns_ = std::move(*exact);
    result.first_ = result.sum(0);
    return result;
  }

  std::vector<FoldMoments> of_repeat(std::size_t repeat) {
    std::vector<FoldMoments> sums = repeat == 0 ? std::move(first_) : sum(repeat);
    for (FoldMoments& fold : sums) {
      if (!scales_) break;
      if (fold.weighted.order() > 0) scales_->apply(fold.weighted);
      if (fold.plain.order() > 0) scales_->apply(fold.plain);
    }
    return sums;
  }

  std::size_t order() const { return columns_.order(); }

  std::vector<double> response_scale() const {
    std::vector<double> scale = columns_.response_scale();
    const std::size_t first = order() - scale.size();
    for (std::size_t r = 0; scales_ && r < scale.size(); ++r) scale[r] /= scales_->factor[first + r];
    return scale;
  }

 private:
  FoldSums(const Data& data, const Folds& folds, unsigned threads) : data_(data), folds_(folds), threads_(threads) {}

  std::vector<FoldMoments> sum(std::size_t repeat) const {
    assert(folds_.fold_of[repeat].size() == data_.n_rows);
    return sum_folds(data_, columns_, folds_.fold_of[repeat], folds_.count, threads_);
  }

  static Moments total(const std::vector<FoldMoments>& folds) {
    Moments all;
    for (const FoldMoments& fold : folds) join(all, fold.weighted);
    return all;
  }

  const Data& data_;
  const Folds& folds_;
  unsigned threads_;
  StandardColumns columns_;
  std::optional<ColumnScales> scales_;  ///< what the maps lack; nothing when they are exact
  std::vector<FoldMoments> first_;
};

}  // namespace

double gram_bytes(const GramSize& size) {
  const double order = static_cast<double>(size.order());
  const double own_order = static_cast<double>(size.n_columns + 2);
  const double n_folds = static_cast<double>(size.folds * size.repeats);
  const double own = static_cast<double>(size.n_own_units) * n_folds * own_order * own_order;
  return ((1.0 + 2.0 * n_folds) * order * order + own) * sizeof(double);
}

double gram_building_bytes(const GramSize& size, unsigned threads) {
  const double order = static_cast<double>(size.order());
  const double n_parts = static_cast<double>(size.folds + size.n_rows / rows_in_part(size.n_rows));
  const double sums = n_parts * (size.weighted ? 2.0 : 1.0);
  const double joined_after = static_cast<double>(size.folds) + 3.0;
  const double blocks = threads * (2.0 * base::kRowChunk + order) * order;
  return ((sums + joined_after) * order * order + blocks) * sizeof(double);
}

Result<base::GramSet> build_grams(const Data& data, const Folds& folds, unsigned threads) {
  auto sums = FoldSums::start(data, folds, threads);
  if (!sums) return sums.error();
  base::GramSet set;
  set.n_rows = data.n_rows;
  set.n_responses = data.response_forms.size();
  set.n_columns = sums->order() - set.n_responses;
  set.response_scale = sums->response_scale();
  for (std::size_t repeat = 0; repeat < folds.fold_of.size(); ++repeat) add_repeat(sums->of_repeat(repeat), set);
  set.n_folds = set.training.size();
  return set;
}

}  // namespace formsieve::design

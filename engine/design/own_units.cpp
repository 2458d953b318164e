#include "design/own_units.hpp"

#include "base/parallel.hpp"
#include "base/sums.hpp"
#include "design/moments.hpp"
#include "design/parts.hpp"
#include "design/standardise.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <utility>

namespace formsieve::design {

namespace {

/// Weighted means of a set of rows.
struct Means {
  double weight = 0.0;
  std::vector<double> mean;
};

void join(Means& set, const Means& other) {
  if (other.weight == 0.0) return;
  set.mean.resize(other.mean.size(), 0.0);
  set.weight += other.weight;
  for (std::size_t c = 0; c < set.mean.size(); ++c)
    set.mean[c] += other.weight / set.weight * (other.mean[c] - set.mean[c]);
}

/// One pass for one pilot and repeat.
struct Pass {
  const Data& data;
  const StandardColumns& columns;
  std::size_t n_columns;  ///< without responses
  std::size_t response;
  double response_scale;
  double largest_slope;
  const std::vector<double>& slope;
  const std::vector<double>& working;

  std::size_t order() const { return n_columns + 2; }
};

/// Sums over rows of one fold.
struct FoldSums {
  Moments held_out;  ///< by w: columns, response, shift
  Means means;       ///< by the weights of the data: columns, response
};

std::vector<double> gathered(const std::vector<double>& values, std::span<const std::uint32_t> rows) {
  std::vector<double> result;
  result.reserve(rows.size());
  for (const std::uint32_t row : rows) result.push_back(values[row]);
  return result;
}

/// Columns, response and shift of a chunk, kRowChunk apart. `values` has room for all columns and responses, and for
/// order() columns.
void evaluate(const Pass& pass, std::span<const std::uint32_t> chunk, std::vector<double>& values) {
  pass.columns.evaluate(pass.data, chunk, values);
  double* const response = values.data() + pass.n_columns * base::kRowChunk;
  std::copy_n(response + pass.response * base::kRowChunk, chunk.size(), response);
  const std::vector<double> raw = gathered(pass.data.response, chunk);
  std::vector<double> on_form(chunk.size());
  forms::evaluate_column(pass.data.response_forms[pass.response], raw, on_form);
  double* const shift = response + base::kRowChunk;
  for (std::size_t i = 0; i < chunk.size(); ++i) shift[i] = (pass.working[chunk[i]] - on_form[i]) / pass.response_scale;
}

Means means_of(const Pass& pass, const std::vector<double>& values, std::span<const double> weights,
               std::size_t n_rows) {
  Means means{weights.empty() ? static_cast<double>(n_rows) : base::sum(weights), {}};
  for (std::size_t c = 0; c <= pass.n_columns; ++c)
    means.mean.push_back(base::weighted_mean({values.data() + c * base::kRowChunk, n_rows}, weights));
  return means;
}

FoldSums sum_rows(const Pass& pass, const std::vector<std::uint32_t>& rows, PartWorkspace& workspace) {
  FoldSums sums;
  std::vector<double>& values = workspace.values;
  values.resize(std::max(pass.columns.order(), pass.order()) * base::kRowChunk);
  for (std::size_t first = 0; first < rows.size(); first += base::kRowChunk) {
    const auto chunk = std::span(rows).subspan(first, std::min(base::kRowChunk, rows.size() - first));
    evaluate(pass, chunk, values);
    workspace.weights.clear();
    if (!pass.data.weights.empty()) workspace.weights = gathered(pass.data.weights, chunk);
    join(sums.means, means_of(pass, values, workspace.weights, chunk.size()));
    workspace.weights = gathered(pass.slope, chunk);
    for (double& w : workspace.weights) w = (w / pass.largest_slope) * (w / pass.largest_slope);
    add_block(sums.held_out, {chunk.size(), pass.order(), values.data()}, workspace.weights, workspace.block);
  }
  mirror(sums.held_out);
  return sums;
}

std::vector<FoldSums> sum_parts(const Pass& pass, const std::vector<Part>& parts, unsigned threads) {
  const std::vector<std::size_t> order = working_order(parts);
  std::vector<FoldSums> sums(parts.size());
  PartWorkspaces workspaces;
  base::parallel_for(parts.size(), threads, [&](std::size_t i) {
    auto workspace = workspaces.take();
    sums[order[i]] = sum_rows(pass, parts[order[i]].rows, *workspace);
    workspaces.give_back(std::move(workspace));
  });
  return sums;
}

std::vector<FoldSums> sum_folds(const Pass& pass, const std::vector<std::uint32_t>& fold_of, std::size_t n_folds,
                                unsigned threads) {
  const std::vector<Part> parts = cut(fold_of, n_folds);
  std::vector<FoldSums> sums = sum_parts(pass, parts, threads);
  std::vector<FoldSums> folds(n_folds);
  std::size_t p = 0;
  for (std::size_t fold = 0; fold < n_folds; ++fold) {
    std::vector<Moments> held_out;
    for (; p < parts.size() && parts[p].fold == fold; ++p) {
      held_out.push_back(std::move(sums[p].held_out));
      join(folds[fold].means, sums[p].means);
    }
    folds[fold].held_out = join_all(std::move(held_out));
  }
  return folds;
}

/// The held-out sums of one fold about the training means, the shift about 0.
std::vector<double> about_training_means(const FoldSums& fold, const Means& training) {
  std::vector<double> d = fold.held_out.mean;
  for (std::size_t c = 0; c < training.mean.size(); ++c) d[c] -= training.mean[c];
  std::vector<double> gram = fold.held_out.cross;
  add_outer_product(gram, fold.held_out.weight, d);
  return gram;
}

void add_repeat(const std::vector<FoldSums>& folds, std::size_t order, base::GramSet::OwnUnits& own) {
  for (std::size_t f = 0; f < folds.size(); ++f) {
    Means training;
    for (std::size_t g = 0; g < folds.size(); ++g)
      if (g != f) join(training, folds[g].means);
    if (folds[f].held_out.weight > 0.0)
      own.validation.push_back(about_training_means(folds[f], training));
    else
      own.validation.emplace_back(order * order, 0.0);
  }
}

double largest_size(const std::vector<std::vector<double>>& values) {
  double largest = 0.0;
  for (const auto& some : values)
    for (const double value : some) largest = std::max(largest, std::abs(value));
  return largest;
}

}  // namespace

Result<std::vector<base::GramSet::OwnUnits>> build_own_units_grams(const Data& data, const Folds& folds,
                                                                   std::span<const Pilot> pilots, unsigned threads) {
  std::vector<base::GramSet::OwnUnits> result;
  if (pilots.empty()) return result;
  const auto columns = StandardColumns::fit(data, threads);
  if (!columns) return columns.error();
  const std::size_t n_columns = columns->order() - data.response_forms.size();
  const std::vector<double> response_scale = columns->response_scale();
  for (const Pilot& pilot : pilots) {
    assert(pilot.slope.size() == folds.repeats && pilot.working.size() == folds.repeats);
    const double scale = response_scale[pilot.response];
    const double largest_slope = largest_size(pilot.slope);
    base::GramSet::OwnUnits own{pilot.response, largest_slope * scale * (largest_slope * scale), {}};
    for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
      const Pass pass{data,  *columns,      n_columns,           pilot.response,
                      scale, largest_slope, pilot.slope[repeat], pilot.working[repeat]};
      add_repeat(sum_folds(pass, folds.fold_of[repeat], folds.count, threads), pass.order(), own);
    }
    result.push_back(std::move(own));
  }
  return result;
}

}  // namespace formsieve::design

#include "model/scorer.hpp"

#include "backtransform/intervals.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::model {

namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// out[i] = Σ_j coefficients[j]·columns[j·kBatchRows + i], four columns at a time so that sums stay in registers.
void combine(const double* columns, std::span<const double> coefficients, std::size_t n, double* out) {
  std::fill_n(out, n, 0.0);
  std::size_t j = 0;
  for (; j + 4 <= coefficients.size(); j += 4) {
    const double* const a = columns + j * kBatchRows;
    const double c0 = coefficients[j], c1 = coefficients[j + 1], c2 = coefficients[j + 2], c3 = coefficients[j + 3];
    for (std::size_t i = 0; i < n; ++i)
      out[i] += (c0 * a[i] + c1 * a[kBatchRows + i]) + (c2 * a[2 * kBatchRows + i] + c3 * a[3 * kBatchRows + i]);
  }
  for (; j < coefficients.size(); ++j) {
    const double* const a = columns + j * kBatchRows;
    const double c = coefficients[j];
    for (std::size_t i = 0; i < n; ++i) out[i] += c * a[i];
  }
}

std::vector<std::vector<double>> rows_of_root(const Model& model) {
  std::vector<std::vector<double>> rows;
  const std::size_t p = model.coefficients.size();
  auto at = model.root.begin();
  for (std::size_t i = 0; i < p; ++i) {
    const auto next = at + static_cast<std::ptrdiff_t>(p - i);
    rows.emplace_back(at, next);
    at = next;
  }
  return rows;
}

constexpr std::uint8_t kNoPrediction = kMissing | kUnknown | kUndefined;

/// Rows whose value is no finite number, unless it has been said already why they have no prediction.
void flag_undefined(std::span<const double> values, Scores& scores) {
  for (std::size_t i = 0; i < values.size(); ++i)
    if (!std::isfinite(values[i]) && (scores.flags[i] & kNoPrediction) == 0) scores.flags[i] |= kUndefined;
}

}  // namespace

Scorer::Scorer(Model model, double level)
    : model_(std::move(model)),
      quantile_(backtransform::NormalInterval(model_.response, model_.sigma, model_.df(), level).quantile()),
      mean_(model_.response, model_.mean),
      cross_(model_.folds, level),
      root_rows_(rows_of_root(model_)),
      inverse_domain_(forms::inverse_domain(model_.response)),
      own_domain_(forms::response_domain(model_.response)),
      rises_(forms::monotone_sign(model_.response) > 0) {}

bool Scorer::has_normal() const { return std::isfinite(quantile_) && std::isfinite(model_.sigma); }

std::uint8_t Scorer::flags_of(std::size_t term, double value) const {
  const Term& of = model_.terms[term];
  if (std::isnan(value)) return kMissing;
  if (of.form.kind == forms::Kind::levels) return value == kUnknownLevel ? kUnknown : 0;
  std::uint8_t flags = value < of.seen_min || value > of.seen_max ? kOutside : 0;
  std::vector<double> columns(forms::n_columns(of.form));
  forms::evaluate(of.form, value, columns);
  for (const double column : columns)
    if (!std::isfinite(column)) flags |= kUndefined;
  return flags;
}

void Scorer::score(std::span<const std::span<const double>> values, std::span<const double> weights, std::size_t n,
                   Workspace& work, Scores& scores) const {
  scores.flags.fill(0);
  for (std::size_t i = 0; i < weights.size(); ++i)
    if (!(weights[i] > 0.0)) scores.flags[i] = kUndefined;
  evaluate_terms(values, n, work, scores);
  combine(work.columns.data(), model_.coefficients, n, work.eta.data());
  flag_undefined({work.eta.data(), n}, scores);
  set_leverage(n, work, scores);
  set_median(n, work, scores);
  mean_.of({work.eta.data(), n}, weights, {scores.median.data(), n}, work.mean, {scores.mean.data(), n});
  set_normal(weights, n, work, scores);
  set_cross(weights, n, work, scores);
  blank_undefined(n, scores);
}

/// Design columns of every term, and the flags that each value calls for.
void Scorer::evaluate_terms(std::span<const std::span<const double>> values, std::size_t n, Workspace& work,
                            Scores& scores) const {
  double* column = work.columns.data();
  std::fill_n(column, n, 1.0);
  column += kBatchRows;
  for (std::size_t t = 0; t < model_.terms.size(); ++t) {
    const Term& term = model_.terms[t];
    const double* const x = values[t].data();
    const std::size_t width = forms::n_columns(term.form);
    const bool is_levels = term.form.kind == forms::Kind::levels;
    if (!is_levels)
      for (std::size_t i = 0; i < n; ++i)
        scores.flags[i] |= static_cast<std::uint8_t>((x[i] < term.seen_min || x[i] > term.seen_max) * kOutside);
    double* const packed = width == 1 ? column : work.packed(width);
    forms::evaluate_column(term.form, values[t].first(n), {packed, width * n});
    for (std::size_t c = 0; c < width; ++c, column += kBatchRows) {
      if (width > 1) std::copy_n(packed + c * n, n, column);
      for (std::size_t i = 0; i < n; ++i) {
        if (std::isfinite(column[i])) continue;
        const bool unknown = is_levels && x[i] == kUnknownLevel;
        scores.flags[i] |= std::isnan(x[i]) ? kMissing : unknown ? kUnknown : kUndefined;
      }
    }
  }
}

void Scorer::set_leverage(std::size_t n, Workspace& work, Scores& scores) const {
  double* const h = scores.leverage.data();
  std::fill_n(h, n, 0.0);
  for (std::size_t row = 0; row < root_rows_.size(); ++row) {
    combine(work.columns.data() + row * kBatchRows, root_rows_[row], n, work.sum.data());
    for (std::size_t i = 0; i < n; ++i) h[i] += work.sum[i] * work.sum[i];
  }
  const double limit = model_.largest_leverage * (1.0 + kLeverageRounding);
  for (std::size_t i = 0; i < n; ++i) scores.flags[i] |= static_cast<std::uint8_t>((h[i] > limit) * kLeverage);
}

void Scorer::set_median(std::size_t n, Workspace& work, Scores& scores) const {
  forms::inverse_column(model_.response, {work.eta.data(), n}, {scores.median.data(), n});
  flag_undefined({scores.median.data(), n}, scores);
}

void Scorer::set_normal(std::span<const double> weights, std::size_t n, Workspace& work, Scores& scores) const {
  if (!has_normal()) {
    scores.low_normal.fill(kNaN);
    scores.high_normal.fill(kNaN);
    return;
  }
  const double reach = quantile_ * model_.sigma;
  for (std::size_t i = 0; i < n; ++i) {
    const double variance = (weights.empty() ? 1.0 : 1.0 / weights[i]) + scores.leverage[i];
    work.low[i] = work.eta[i] - reach * std::sqrt(variance);
    work.high[i] = work.eta[i] + reach * std::sqrt(variance);
  }
  carry(n, work, scores, scores.low_normal, scores.high_normal);
}

void Scorer::set_cross(std::span<const double> weights, std::size_t n, Workspace& work, Scores& scores) const {
  if (!has_cross()) {
    scores.low_cross.fill(kNaN);
    scores.high_cross.fill(kNaN);
    return;
  }
  std::fill_n(work.sum.data(), n, 0.0);
  for (std::size_t g = 0; g < k(); ++g) {
    double* const predicted = work.folds.data() + g * kBatchRows;
    combine(work.columns.data(), model_.folds[g].coefficients, n, predicted);
    for (std::size_t i = 0; i < n; ++i) work.sum[i] += predicted[i];
  }
  for (std::size_t i = 0; i < n; ++i) {
    work.low[i] = work.high[i] = kNaN;
    if ((scores.flags[i] & kNoPrediction) != 0 || !std::isfinite(work.sum[i])) continue;
    const double scale = weights.empty() ? 1.0 : 1.0 / std::sqrt(weights[i]);
    const double* const predicted = work.folds.data() + i;
    work.low[i] = -cross_.at(predicted, kBatchRows, -1.0, scale);
    work.high[i] = cross_.at(predicted, kBatchRows, 1.0, scale);
  }
  carry(n, work, scores, scores.low_cross, scores.high_cross);
}

/// The ends in work.low and work.high carried through the inverse, as backtransform::carried does.
void Scorer::carry(std::size_t n, Workspace& work, Scores& scores, Scores::Values& low, Scores::Values& high) const {
  Scores::Values& from_low = rises_ ? low : high;
  Scores::Values& from_high = rises_ ? high : low;
  const auto carry_ends = [&](const double* z, double* own) {
    forms::inverse_column(model_.response, {z, n}, {own, n});
    for (std::size_t i = 0; i < n; ++i) {
      if (z[i] <= inverse_domain_.lower && !inverse_domain_.lower_closed)
        own[i] = rises_ ? own_domain_.lower : own_domain_.upper;
      if (z[i] >= inverse_domain_.upper && !inverse_domain_.upper_closed)
        own[i] = rises_ ? own_domain_.upper : own_domain_.lower;
      if (!std::isfinite(own[i])) scores.flags[i] |= kOpenEnd;
    }
  };
  carry_ends(work.low.data(), from_low.data());
  carry_ends(work.high.data(), from_high.data());
}

/// A row without a prediction has no figure at all, and no flag that only a prediction could earn.
void Scorer::blank_undefined(std::size_t n, Scores& scores) const {
  for (std::size_t i = 0; i < n; ++i) {
    if ((scores.flags[i] & kNoPrediction) != 0) {
      for (auto* values : {&scores.mean, &scores.median, &scores.low_normal, &scores.high_normal, &scores.low_cross,
                           &scores.high_cross, &scores.leverage})
        (*values)[i] = kNaN;
      scores.flags[i] &= static_cast<std::uint8_t>(kNoPrediction | kOutside);
    } else if (std::isnan(scores.mean[i])) {
      scores.flags[i] |= kNoMean;
    }
  }
}

}  // namespace formsieve::model

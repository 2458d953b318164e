#include "design/standardise.hpp"

#include "base/parallel.hpp"
#include "base/sums.hpp"
#include "design/form_values.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

namespace formsieve::design {

namespace {

/// A column whose standard deviation is below this share of its mean is constant: the spread is a few hundred roundings
/// of its values, and their differences have no digits left.
constexpr double kConstantSpread_rel = 1e-13;
/// A column of a form is determined by those before it when less than this share of its variance is left: beyond it the
/// roundings of its values, 1e-16 of the column, are more than 1e-10 of what is left.
constexpr double kDependentVariance_rel = 1e-12;
/// A provisional map is trusted only where the standard deviation is more than this share of the mean: what is nearer
/// to constant is left to the exact maps, which tell a small spread from roundings.
constexpr double kTrustedSpread_rel = 1e-7;
/// Below this a sum of squares may have lost digits to underflow.
constexpr double kSmallestSum = 1e-250;

/// One form with the values it is made of.
struct Source {
  const forms::Form* form;
  const std::vector<double>* raw;
  const Predictor* predictor;  ///< null for a response form
};

std::vector<Source> sources(const Data& data) {
  std::vector<Source> result;
  for (const Predictor& predictor : data.predictors)
    for (const forms::Form& form : predictor.menu) result.push_back({&form, &predictor.raw, &predictor});
  for (const forms::Form& form : data.response_forms) result.push_back({&form, &data.response, nullptr});
  return result;
}

std::span<const double> chunk_of(const std::vector<double>& values, std::size_t first) {
  if (values.empty()) return {};
  return std::span(values).subspan(first, std::min(base::kRowChunk, values.size() - first));
}

/// Values of a form on a chunk of rows, its columns kRowChunk apart.
void evaluate_apart(const forms::Form& form, std::span<const double> x, std::span<double> scratch, double* out) {
  const std::size_t n_columns = forms::n_columns(form);
  if (n_columns == 1) {
    values_for_sums(form, x, {out, x.size()});
    return;
  }
  forms::evaluate_column(form, x, scratch.first(n_columns * x.size()));
  for (std::size_t c = 0; c < n_columns; ++c)
    std::copy_n(scratch.data() + c * x.size(), x.size(), out + c * base::kRowChunk);
}

/// Moments of one form over all rows, after a map.
Moments moments_of_form(const Data& data, const Source& source, const Standardiser& map) {
  const std::size_t n_columns = map.n_columns;
  std::vector<double> scratch(n_columns * base::kRowChunk);
  std::vector<double> columns(n_columns * base::kRowChunk);
  BlockWorkspace workspace;
  std::vector<Moments> chunks;
  for (std::size_t first = 0; first < data.n_rows; first += base::kRowChunk) {
    const auto x = chunk_of(*source.raw, first);
    evaluate_apart(*source.form, x, scratch, columns.data());
    map.apply(columns.data(), x.size());
    chunks.push_back(moments_of({x.size(), n_columns, columns.data()}, chunk_of(data.weights, first), workspace));
  }
  return join_all(std::move(chunks));
}

/// The first row on which a form is not a finite number, and the largest size of each column.
struct Range {
  std::optional<std::size_t> undefined_row;
  std::vector<double> largest;
};

Range range_of_form(const Data& data, const Source& source, std::size_t n_columns) {
  Range range{std::nullopt, std::vector<double>(n_columns, 0.0)};
  std::vector<double> values(n_columns * base::kRowChunk);
  for (std::size_t first = 0; first < data.n_rows; first += base::kRowChunk) {
    const auto x = chunk_of(*source.raw, first);
    forms::evaluate_column(*source.form, x, std::span(values).first(n_columns * x.size()));
    for (std::size_t i = 0; i < x.size(); ++i) {
      for (std::size_t c = 0; c < n_columns; ++c) {
        const double value = values[c * x.size() + i];
        if (!std::isfinite(value)) return {first + i, {}};
        range.largest[c] = std::max(range.largest[c], std::abs(value));
      }
    }
  }
  return range;
}

Standardiser identity_map(std::size_t n_columns) {
  Standardiser map{n_columns, std::vector<double>(n_columns, 1.0), std::vector<double>(n_columns, 0.0),
                   std::vector<double>(n_columns * n_columns, 0.0)};
  for (std::size_t c = 0; c < n_columns; ++c) map.t[c * n_columns + c] = 1.0;
  return map;
}

/// Whether every sum of squares is far from the ends of the range of numbers.
bool in_range(const Moments& moments) {
  for (std::size_t c = 0; c < moments.order(); ++c) {
    const double own = moments.cross[c * (moments.order() + 1)];
    if (!std::isfinite(own) || own < kSmallestSum) return false;
  }
  return true;
}

/// Rows of the inverse of the Cholesky factor of a covariance matrix, by columns that are neither constant nor
/// determined by those before; zero rows for the others. `before`: variances against which the pivots are judged.
std::vector<double> whitening(const Moments& moments, std::span<const double> smallest_variance) {
  const std::size_t n = moments.order();
  std::vector<double> whitener(n * n, 0.0);
  std::vector<double> schur = moments.cross;
  for (double& value : schur) value /= moments.weight;
  std::vector<double> operations(n * n, 0.0);  // row c: what the eliminated column c is made of
  for (std::size_t c = 0; c < n; ++c) operations[c * n + c] = 1.0;
  for (std::size_t p = 0; p < n; ++p) {
    const double variance = schur[p * n + p];
    if (!(variance > smallest_variance[p])) continue;
    for (std::size_t k = 0; k <= p; ++k) whitener[p * n + k] = operations[p * n + k] / std::sqrt(variance);
    for (std::size_t c = p + 1; c < n; ++c) {
      const double m = schur[p * n + c] / variance;
      for (std::size_t k = 0; k <= p; ++k) operations[c * n + k] -= m * operations[p * n + k];
      for (std::size_t d = p + 1; d < n; ++d) schur[c * n + d] -= m * schur[p * n + d];
    }
  }
  return whitener;
}

/// The smallest variance of each column that is not rounding.
std::vector<double> smallest_variances(const Moments& moments) {
  std::vector<double> smallest;
  for (std::size_t c = 0; c < moments.order(); ++c) {
    const double constant = std::abs(moments.mean[c]) * kConstantSpread_rel;
    const double dependent = moments.cross[c * (moments.order() + 1)] / moments.weight * kDependentVariance_rel;
    smallest.push_back(std::max(constant * constant, dependent));
  }
  return smallest;
}

std::vector<double> product(const std::vector<double>& a, const std::vector<double>& b, std::size_t n) {
  std::vector<double> result(n * n, 0.0);
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t k = 0; k < n; ++k)
      for (std::size_t j = 0; j < n; ++j) result[i * n + j] += a[i * n + k] * b[k * n + j];
  return result;
}

/// Finds the map of one form. A second pass over the rows takes out what the roundings of the first left correlated.
Standardiser standardiser_of(const Data& data, const Source& source, const Range& range) {
  const std::size_t n = range.largest.size();
  Standardiser map = identity_map(n);
  Moments moments = moments_of_form(data, source, map);
  if (!in_range(moments)) {
    for (std::size_t c = 0; c < n; ++c)
      if (range.largest[c] > 0.0) map.power_of_two[c] = std::ldexp(1.0, -std::ilogb(range.largest[c]));
    moments = moments_of_form(data, source, map);
  }
  map.centre = moments.mean;
  map.t = whitening(moments, smallest_variances(moments));
  if (n > 1) {
    const std::vector<double> half(n, 0.5);  // a variance is 1, or 0 where the first pass gave the column up
    map.t = product(whitening(moments_of_form(data, source, map), half), map.t, n);
  }
  return map;
}

/// The map of a form of one column that gives the first rows mean 0 and variance 1.
Standardiser map_of_first_rows(const Source& source) {
  Standardiser map = identity_map(1);
  const auto x = chunk_of(*source.raw, 0);
  std::vector<double> values(x.size());
  forms::evaluate_column(*source.form, x, values);
  double largest = 0.0;
  for (const double value : values) largest = std::max(largest, std::abs(value));
  if (!std::isfinite(largest) || largest == 0.0) return map;
  map.power_of_two[0] = std::ldexp(1.0, -std::ilogb(largest));
  for (double& value : values) value *= map.power_of_two[0];
  map.centre[0] = base::mean(values);
  const double variance = base::sum_of_squares(values, map.centre[0]) / static_cast<double>(values.size());
  if (std::isfinite(variance) && variance > kSmallestSum) map.t[0] = 1.0 / std::sqrt(variance);
  return map;
}

/// Whether the moments of a column under a provisional map are good for a better one. Its mean is never so many
/// standard deviations from 0 as to cost digits: the first rows, whose mean is 0, are a share of the rows.
bool is_trusted(const Standardiser& map, const Moments& all, std::size_t c) {
  const double own = all.cross[c * (all.order() + 1)];
  if (!std::isfinite(own) || own < kSmallestSum) return false;
  const double mean = map.centre[0] + all.mean[c] / map.t[0];
  return std::sqrt(own / all.weight) / map.t[0] > kTrustedSpread_rel * std::abs(mean);
}

Error undefined_on(const Data& data, const Source& source, std::size_t row) {
  const std::string column = source.predictor != nullptr ? source.predictor->column : "response";
  Error error{ErrorKind::data, forms::term_name(*source.form, column) + " is not a finite number on a row in use", "",
              ""};
  const std::size_t table_row = data.table_row.empty() ? row : data.table_row[row];
  error.where = "table row " + std::to_string(table_row + 1);
  if (source.predictor != nullptr) error.where += ", column '" + column + "'";
  error.hint = "leave the form out of the menu, or give it a shift or a reflection that makes it finite on every row";
  return error;
}

Status check_weights(const Data& data) {
  for (std::size_t i = 0; i < data.weights.size(); ++i) {
    if (std::isfinite(data.weights[i]) && data.weights[i] > 0.0) continue;
    const std::size_t table_row = data.table_row.empty() ? i : data.table_row[i];
    return Error{ErrorKind::data, "a weight must be a positive number", "table row " + std::to_string(table_row + 1),
                 "remove the row, or give it a positive weight"};
  }
  return {};
}

}  // namespace

void Standardiser::apply(double* columns, std::size_t n_rows) const {
  if (n_columns == 1) {
    const double p = power_of_two[0];
    const double mean = centre[0];
    const double factor = t[0];
    for (std::size_t i = 0; i < n_rows; ++i) columns[i] = (columns[i] * p - mean) * factor;
    return;
  }
  const auto column = [&](std::size_t c) { return columns + c * base::kRowChunk; };
  for (std::size_t c = 0; c < n_columns; ++c)
    for (std::size_t i = 0; i < n_rows; ++i) column(c)[i] = column(c)[i] * power_of_two[c] - centre[c];
  // from the last, since a row of T needs the columns before its own as they were
  for (std::size_t c = n_columns; c-- > 0;) {
    const double* row = t.data() + c * n_columns;
    for (std::size_t i = 0; i < n_rows; ++i) column(c)[i] *= row[c];
    for (std::size_t k = 0; k < c; ++k)
      for (std::size_t i = 0; row[k] != 0.0 && i < n_rows; ++i) column(c)[i] += row[k] * column(k)[i];
  }
}

void ColumnScales::apply(Moments& moments) const {
  const std::size_t order = moments.order();
  for (std::size_t j = 0; j < order; ++j) {
    moments.mean[j] = (moments.mean[j] - shift[j]) * factor[j];
    // the product of the factors first, so that the matrix stays symmetric to the bit
    for (std::size_t i = 0; i < order; ++i) moments.cross[i + j * order] *= factor[i] * factor[j];
  }
}

Result<StandardColumns> StandardColumns::fit(const Data& data, unsigned threads) {
  return with_maps(data, threads, false);
}

Result<StandardColumns> StandardColumns::provisional(const Data& data, unsigned threads) {
  return with_maps(data, threads, true);
}

Result<StandardColumns> StandardColumns::with_maps(const Data& data, unsigned threads, bool provisional) {
  if (const Status status = check_weights(data); !status) return status.error();
  const std::vector<Source> all = sources(data);
  std::vector<std::optional<std::size_t>> undefined_row(all.size());
  StandardColumns result;
  result.n_responses_ = data.response_forms.size();
  result.standardisers_.resize(all.size());
  base::parallel_for(all.size(), threads, [&](std::size_t s) {
    const std::size_t n_columns = forms::n_columns(*all[s].form);
    if (provisional && n_columns == 1) {
      result.standardisers_[s] = map_of_first_rows(all[s]);
      return;
    }
    const Range range = range_of_form(data, all[s], n_columns);
    undefined_row[s] = range.undefined_row;
    if (!range.undefined_row) result.standardisers_[s] = standardiser_of(data, all[s], range);
  });
  for (std::size_t s = 0; s < all.size(); ++s) {
    if (undefined_row[s]) return undefined_on(data, all[s], *undefined_row[s]);
    const Standardiser& map = result.standardisers_[s];
    result.order_ += map.n_columns;
    if (all[s].predictor == nullptr && map.t[0] == 0.0)
      return Error{ErrorKind::data, "the response has the same value on every row in use", "",
                   "choose a response that varies"};
  }
  return result;
}

std::optional<ColumnScales> StandardColumns::remaining_scales(const Moments& all) const {
  ColumnScales scales{std::vector<double>(order_, 0.0), std::vector<double>(order_, 1.0)};
  std::size_t c = 0;
  for (const Standardiser& map : standardisers_) {
    if (map.n_columns == 1) {
      if (!is_trusted(map, all, c)) return std::nullopt;
      scales.shift[c] = all.mean[c];
      scales.factor[c] = 1.0 / std::sqrt(all.cross[c * (order_ + 1)] / all.weight);
    }
    c += map.n_columns;
  }
  return scales;
}

std::vector<double> StandardColumns::response_scale() const {
  std::vector<double> scale;
  for (std::size_t s = standardisers_.size() - n_responses_; s < standardisers_.size(); ++s)
    scale.push_back(1.0 / (standardisers_[s].t[0] * standardisers_[s].power_of_two[0]));
  return scale;
}

void StandardColumns::evaluate(const Data& data, std::span<const std::uint32_t> rows, std::span<double> out) const {
  std::vector<double> x(rows.size());
  std::vector<double> scratch;
  double* columns = out.data();
  const Standardiser* next = standardisers_.data();
  const auto gather = [&](const std::vector<double>& raw) {
    for (std::size_t i = 0; i < rows.size(); ++i) x[i] = raw[rows[i]];
  };
  const auto write = [&](const forms::Form& form) {
    scratch.resize(std::max(scratch.size(), next->n_columns * rows.size()));
    evaluate_apart(form, x, scratch, columns);
    next->apply(columns, rows.size());
    columns += next->n_columns * base::kRowChunk;
    ++next;
  };
  for (const Predictor& predictor : data.predictors) {
    gather(predictor.raw);
    for (const forms::Form& form : predictor.menu) write(form);
  }
  gather(data.response);
  for (const forms::Form& form : data.response_forms) write(form);
}

}  // namespace formsieve::design

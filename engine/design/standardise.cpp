#include "design/standardise.hpp"

#include "base/parallel.hpp"
#include "base/sums.hpp"

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
    forms::evaluate_column(form, x, {out, x.size()});
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

Result<StandardColumns> StandardColumns::fit(const Data& data, unsigned threads) {
  if (const Status status = check_weights(data); !status) return status.error();
  const std::vector<Source> all = sources(data);
  std::vector<std::optional<std::size_t>> undefined_row(all.size());
  StandardColumns result;
  result.standardisers_.resize(all.size());
  base::parallel_for(all.size(), threads, [&](std::size_t s) {
    const Range range = range_of_form(data, all[s], forms::n_columns(*all[s].form));
    undefined_row[s] = range.undefined_row;
    if (!range.undefined_row) result.standardisers_[s] = standardiser_of(data, all[s], range);
  });
  for (std::size_t s = 0; s < all.size(); ++s) {
    if (undefined_row[s]) return undefined_on(data, all[s], *undefined_row[s]);
    const Standardiser& map = result.standardisers_[s];
    result.order_ += map.n_columns;
    if (all[s].predictor != nullptr) continue;
    if (map.t[0] == 0.0)
      return Error{ErrorKind::data, "the response has the same value on every row in use", "",
                   "choose a response that varies"};
    result.response_scale_.push_back(1.0 / (map.t[0] * map.power_of_two[0]));
  }
  return result;
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

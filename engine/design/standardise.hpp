// How design columns and responses are standardised: a linear map within each form, found from all rows.
#pragma once

#include "design/design.hpp"
#include "design/moments.hpp"

#include <formsieve/base.hpp>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <vector>

namespace formsieve::design {

/// The columns of one form, x of n columns, become z = T (p∘x − centre) with T lower triangular: weighted mean 0,
/// weighted variance 1, and uncorrelated within the form. A column that is constant, or that the columns before it
/// determine, becomes 0.
struct Standardiser {
  std::size_t n_columns = 0;
  std::vector<double> power_of_two;  ///< [n_columns] p: keeps squares of huge or tiny values in range
  std::vector<double> centre;        ///< [n_columns]
  std::vector<double> t;             ///< [n_columns × n_columns] row-major

  /// Standardises in place the n_columns columns of a block, kRowChunk apart.
  void apply(double* columns, std::size_t n_rows) const;
};

/// A linear map of each column, (x − shift) · factor.
struct ColumnScales {
  std::vector<double> shift, factor;

  /// The moments of the mapped columns, from those of the columns. Cost O(order²).
  void apply(Moments& moments) const;
};

/// All columns of a Data: every form of every predictor in layout order, then the response forms.
class StandardColumns {
 public:
  /// Finds the maps. Errors (kind data): a form undefined on a row in use, a response that is the same on every row, a
  /// weight that is not a positive number.
  static Result<StandardColumns> fit(const Data& data, unsigned threads);

  /// Maps from the first rows alone for forms of one column, exact ones for the others, which saves two passes over the
  /// rows: remaining_scales() says afterwards what they lack. Errors as fit(), but a one-column form that is undefined
  /// on some row shows only there.
  static Result<StandardColumns> provisional(const Data& data, unsigned threads);

  /// From the moments of all rows under provisional maps, what takes the columns to mean 0 and variance 1. Nothing when
  /// the moments cannot be trusted for it: a column with values that are not finite, that is nearly constant, or of
  /// which the first rows say nothing.
  std::optional<ColumnScales> remaining_scales(const Moments& all) const;

  std::size_t order() const { return order_; }
  /// Standard deviations of the response forms.
  std::vector<double> response_scale() const;

  /// Standardised values of at most kRowChunk rows: column c of row i to out[c * kRowChunk + i]; out holds
  /// order() * kRowChunk values.
  void evaluate(const Data& data, std::span<const std::uint32_t> rows, std::span<double> out) const;

 private:
  static Result<StandardColumns> with_maps(const Data& data, unsigned threads, bool provisional);

  std::size_t order_ = 0;
  std::vector<Standardiser> standardisers_;  ///< predictors × menu, then response forms
  std::size_t n_responses_ = 0;
};

}  // namespace formsieve::design

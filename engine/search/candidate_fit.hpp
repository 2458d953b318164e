// One candidate fitted and scored from the Gram matrices, by itself: what the walk shares along a tree, in plain form.
//
// With β the coefficients that the training matrix A of a fold gives to the candidate's columns c, and u = y − Σ β_c c,
// the held-out sum of squares is uᵀVu: V_yy − 2 Σ β_c V_cy + Σ β_c β_d V_cd. The congruence of walk.hpp leaves the same
// number, column by column.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::search {

/// Where the columns of a candidate stand in the Gram, in plan order.
void columns_of(const Space& space, std::span<const std::uint16_t> choice, std::vector<std::size_t>& columns);

/// Coefficients of one candidate in one fold. Memory grows to the widest candidate seen and stays.
class CandidateFit {
 public:
  /// Solves the normal equations of `columns` and the response at index `response` of a dense matrix [order × order],
  /// by L D Lᵀ in the order given. False, and nothing usable, when a pivot is not above kSmallestPivot_rel of its
  /// column's diagonal. Cost O(k³ / 6) for k columns.
  bool solve(std::span<const double> training, std::size_t order, std::span<const std::size_t> columns,
             std::size_t response);

  /// [k] of the last solve.
  std::span<const double> coefficients() const { return coefficients_; }

  /// uᵀVu for u = (response − Σ β_c · column c) of the last solve. Cost O(k²).
  double held_out_sse(std::span<const double> validation, std::size_t order, std::span<const std::size_t> columns,
                      std::size_t response) const;
  /// uᵀv for the column v of the same matrix.
  double held_out_product(std::span<const double> validation, std::size_t order, std::span<const std::size_t> columns,
                          std::size_t response, std::size_t other) const;

 private:
  std::vector<double> lower_, coefficients_;
};

/// Held-out sum of squares of one candidate over all folds, standardised (GramSet::response_scale); infinite where it
/// is inseparable in a fold or on all rows.
double cv_sse_of(const base::GramSet& grams, std::span<const std::size_t> columns, std::size_t response,
                 CandidateFit& fit);

}  // namespace formsieve::search

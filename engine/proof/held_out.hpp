// What the residual sum of squares of a candidate says about its held-out sum of squares.
//
// Weighted least squares with weights w, W = diag(w), and one repeat of the folds. With H the hat matrix of W^½X (the
// intercept among the columns) and e the residuals of all rows, the residuals of the rows f of a fold, held out, are
//     W_f^½ ẽ_f = (I − H_ff)⁻¹ W_f^½ e_f,
// (Cook and Weisberg 1982, section 2.2) and (I − H_ff)⁻¹ ⪰ I, since 0 ⪯ H_ff ≺ I. Hence, row sums over all folds,
//     max(w) Σ ẽ² ≥ Σ w ẽ² ≥ Σ w e² = RSS.
// The held-out sum of a search is not weighted and adds up all repeats: it is at least repeats · RSS / max(w). A set of
// candidates whose RSS is bounded from below beyond max(w) / repeats times the held-out sum of the last of a full list
// holds none for it.
#pragma once

#include "base/gram.hpp"

#include <cstddef>

namespace formsieve::proof {

/// How the held-out rows of a search were made; not to be seen from its Gram matrices.
struct HeldOutRows {
  std::size_t repeats = 0;      ///< times that every row is held out
  double largest_weight = 0.0;  ///< as they are in the Gram matrices; 1 without weights
};

/// What rounding may do to a held-out sum of the walk, in units of that of the empty candidate: ten times what the
/// smallest pivot allows (search::kSmallestPivot_rel).
inline constexpr double kWalkError_rel = 1e-7;

/// One response form, in the units of its Gram matrices.
class HeldOutScale {
 public:
  HeldOutScale(const base::GramSet& grams, std::size_t response, const HeldOutRows& rows);

  /// The held-out sum of the candidate without predictors.
  double empty_sse() const { return empty_sse_; }
  /// A held-out sum that no candidate of a lower or equal one exceeds however it is computed.
  double with_rounding(double cv_sse) const { return cv_sse + kWalkError_rel * empty_sse_; }
  /// The RSS that no candidate exceeds whose computed held-out sum is at most `cv_sse`.
  double largest_rss(double cv_sse) const;

 private:
  double empty_sse_ = 0.0;
  HeldOutRows rows_;
};

}  // namespace formsieve::proof

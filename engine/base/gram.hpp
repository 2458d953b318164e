// Views of Gram matrices, shared by design (which fills them) and search (which eliminates in copies of them).
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::base {

/// The Gram matrices of one search. Columns 0 … n_columns−1 are standardised design columns (multi-column forms
/// orthonormalised within their block over all rows), columns n_columns … n_columns+n_responses−1 the response forms,
/// standardised too. `order` = n_columns + n_responses. All matrices are dense, symmetric, column-major, order × order.
struct GramSet {
  /// Held-out errors of one response form in own units, to first order about a pilot prediction p of each row: with H
  /// the pilot's back-transform, y − H(ẑ) is about H′(p)(z* − ẑ) with the working response z* = p + (y − H(p))/H′(p).
  /// Columns and responses are standardised as in the other matrices; w is H′(p)² over its largest value.
  struct OwnUnits {
    std::size_t response = 0;
    /// A held-out sum here times this is in own units squared: the largest H′(p)² · response_scale².
    double sse_factor = 1.0;
    /// [n_folds] column-major, symmetric, (n_columns + 2) × (n_columns + 2): Σ w (·)(·)ᵀ over the held-out rows of the
    /// columns and, at index n_columns, the response, all centred by the training means as in `validation`; at index
    /// n_columns + 1 the shift δ = z* − z, in units of the response's scale, not centred. An elimination does to the
    /// first n_columns + 1 rows and columns what it does to those of `validation`, with the same m; V_jδ ← V_jδ − m_j
    /// V_cδ; V_δδ stays. Afterwards, y the response and summed over the folds,
    ///     pilot weight        Σ V_yy                      Σ H′(p)² (z − ẑ)²
    ///     working response    Σ V_yy + 2 V_yδ + V_δδ      Σ H′(p)² (z* − ẑ)², the error in own units to first order
    std::vector<std::vector<double>> validation;
  };

  std::size_t n_rows = 0;
  std::size_t n_columns = 0;
  std::size_t n_responses = 0;
  std::size_t n_folds = 0;                    ///< folds × repeats
  std::vector<double> all;                    ///< weighted, all rows, centred by their weighted means
  std::vector<std::vector<double>> training;  ///< [n_folds] A_f: weighted, training rows, centred by the training means
  std::vector<std::vector<double>>
      validation;                      ///< [n_folds] V_f: unweighted, held-out rows, centred by the training means
  std::vector<double> response_scale;  ///< [n_responses] an RSS here times scale² is the RSS on the form's scale
  std::vector<OwnUnits> own_units;     ///< by response; none for the identity, whose scale is own units already

  std::size_t order() const noexcept { return n_columns + n_responses; }
};

}  // namespace formsieve::base

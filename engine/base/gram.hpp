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
  std::size_t n_rows = 0;
  std::size_t n_columns = 0;
  std::size_t n_responses = 0;
  std::size_t n_folds = 0;                    ///< folds × repeats
  std::vector<double> all;                    ///< weighted, all rows, centred by their weighted means
  std::vector<std::vector<double>> training;  ///< [n_folds] A_f: weighted, training rows, centred by the training means
  std::vector<std::vector<double>>
      validation;                      ///< [n_folds] V_f: unweighted, held-out rows, centred by the training means
  std::vector<double> response_scale;  ///< [n_responses] an RSS here times scale² is the RSS on the form's scale

  std::size_t order() const noexcept { return n_columns + n_responses; }
};

}  // namespace formsieve::base

// A second pass over the rows: held-out Gram matrices in own units, about a pilot.
#pragma once

#include "base/gram.hpp"
#include "design/design.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::design {

/// What a pilot says of every row for one response form: with p its out-of-fold prediction in a repeat, on the form's
/// scale, and H its back-transform.
struct Pilot {
  std::size_t response = 0;
  std::vector<std::vector<double>> slope;    ///< [repeats][n_rows] H′(p), finite and not 0
  std::vector<std::vector<double>> working;  ///< [repeats][n_rows] z* = p + (y − H(p))/H′(p), on the form's scale
};

/// Σ w (·)(·)ᵀ over the held-out rows of every fold, in the layout of base::GramSet::OwnUnits, one entry a pilot. Rows
/// are summed in the blocks of build_grams and one pilot after another, so that the memory in use is that of one: the
/// same bits for any number of threads. Weights of the data count in the training means alone. Cost O(n · order²) a
/// pilot and repeat. Errors as build_grams.
Result<std::vector<base::GramSet::OwnUnits>> build_own_units_grams(const Data& data, const Folds& folds,
                                                                   std::span<const Pilot> pilots, unsigned threads);

}  // namespace formsieve::design

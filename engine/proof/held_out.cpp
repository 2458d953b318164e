#include "proof/held_out.hpp"

#include <cassert>

namespace formsieve::proof {

HeldOutScale::HeldOutScale(const base::GramSet& grams, std::size_t response, const HeldOutRows& rows) : rows_(rows) {
  assert(rows.repeats > 0 && rows.largest_weight > 0.0);
  const std::size_t y = grams.n_columns + response;
  for (const auto& validation : grams.validation) empty_sse_ += validation[y * (grams.order() + 1)];
}

double HeldOutScale::largest_rss(double cv_sse) const {
  return rows_.largest_weight * with_rounding(cv_sse) / static_cast<double>(rows_.repeats);
}

}  // namespace formsieve::proof

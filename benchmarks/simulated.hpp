// Invented data for the benchmarks: skewed predictors that correlate a little, some of them active.
#pragma once

#include "base/gram.hpp"
#include "design/design.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <optional>
#include <vector>

namespace formsieve::bench {

/// A problem by its size.
struct Shape {
  std::size_t n_predictors = 8, n_forms = 6, n_responses = 1;
  std::optional<std::size_t> max_terms = std::nullopt;
  std::size_t n_rows = 500;
  std::size_t n_folds = 10;
};

struct Problem {
  Shape shape;
  design::Data data;
  design::Folds folds;
  search::Space space;
};

/// The same bits for the same shape on one machine. At most 8 forms and 3 responses.
Problem simulate(const Shape& shape);

/// The lists by held-out error and by AIC, 50 candidates each, on one thread, without a summary.
search::WalkOptions walk_options(const Problem& problem);

/// Penalty of AIC by number of design columns.
std::vector<double> aic_penalty(const Problem& problem);

}  // namespace formsieve::bench

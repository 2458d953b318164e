#include "pipeline/memory.hpp"

#include "base/parallel.hpp"
#include "pipeline/pilot.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <functional>

namespace formsieve::pipeline {

namespace {

constexpr double kPooledBytes = 1e3;
constexpr double kExaminedBytes = 8e3;
/// Lists that may each hold a pool's worth of candidates for each response form.
constexpr double kLists = 4.0;
/// Copies of a candidate's columns during a fit: the matrix, its factorisation, and what refinement needs.
constexpr double kFitCopies = 3.0;
/// Columns of numbers by row besides: predictions, residuals, leverages and the like.
constexpr double kFitColumns = 16.0;

/// Levels of full size at most: spaces that can be walked in hours are not deeper than a dozen predictors.
constexpr double kMostLevels = 4.0;

/// What the need depends on.
struct Shape {
  design::GramSize grams;
  std::size_t most_terms = 1;
  double widest_candidate = 0.0;  ///< columns
  std::size_t pool = 0;
  unsigned threads = 1;
};

Shape shape_of(const Prepared& prepared, const run::Plan& plan, unsigned threads) {
  Shape shape;
  const design::Layout layout = design::layout(prepared.data);
  const auto& responses = prepared.data.response_forms;
  shape.grams.n_rows = prepared.data.n_rows;
  shape.grams.n_columns = layout.n_columns;
  shape.grams.n_responses = responses.size();
  shape.grams.folds = prepared.folds.count;
  shape.grams.repeats = std::max<std::size_t>(prepared.folds.repeats, 1);
  shape.grams.weighted = !prepared.data.weights.empty();
  shape.grams.n_own_units =
      responses.size() - static_cast<std::size_t>(std::count_if(responses.begin(), responses.end(), is_linear));
  shape.most_terms = std::min(plan.search.max_terms.value_or(layout.block.size()), layout.block.size());
  std::vector<std::size_t> widest;
  for (const auto& forms : layout.block) {
    widest.push_back(0);
    for (const auto& [first, count] : forms) widest.back() = std::max(widest.back(), count);
  }
  std::sort(widest.rbegin(), widest.rend());
  for (std::size_t j = 0; j < shape.most_terms; ++j) shape.widest_candidate += static_cast<double>(widest[j]);
  shape.pool = plan.search.pool;
  shape.threads = threads == 0 ? base::available_threads() : threads;
  return shape;
}

MemoryNeed need_of(const Shape& shape) {
  MemoryNeed need;
  const double pool = static_cast<double>(shape.pool);
  const double rows = static_cast<double>(shape.grams.n_rows);
  const double levels = std::clamp(static_cast<double>(shape.most_terms) / 3.0, 1.0, kMostLevels);
  need.grams = design::gram_bytes(shape.grams);
  need.building = design::gram_building_bytes(shape.grams, shape.threads);
  need.walk = shape.threads * levels * need.grams;
  need.pool = pool * (kLists * static_cast<double>(shape.grams.n_responses) * kPooledBytes + kExaminedBytes);
  need.examining = shape.threads * rows * (kFitCopies * (1.0 + shape.widest_candidate) + kFitColumns) * sizeof(double);
  return need;
}

bool fits(const Shape& shape, double available) { return need_of(shape).peak() <= available; }

/// The largest value from `least` to `most` with which it fits, when there is one.
std::optional<std::size_t> largest_fitting(std::size_t least, std::size_t most,
                                           const std::function<bool(std::size_t)>& fits_with) {
  if (least > most || !fits_with(least)) return std::nullopt;
  while (least < most) {
    const std::size_t middle = most - (most - least) / 2;
    if (fits_with(middle))
      least = middle;
    else
      most = middle - 1;
  }
  return least;
}

/// "3.2 GB", "150 MB"
std::string size_words(double bytes) {
  char text[32];
  if (bytes >= 1e9)
    std::snprintf(text, sizeof text, "%.1f GB", bytes / 1e9);
  else
    std::snprintf(text, sizeof text, "%.0f MB", std::ceil(bytes / 1e6));
  return text;
}

struct Advice {
  std::string key, text;
};

/// The gentlest change that is enough: fewer repeats, then fewer folds, then fewer columns, then a smaller pool.
Advice advice_for(const Shape& shape, const run::Plan& plan, double available) {
  const auto with_repeats = [&](std::size_t repeats) {
    Shape other = shape;
    other.grams.repeats = repeats;
    return fits(other, available);
  };
  const auto with_folds = [&](std::size_t folds) {
    Shape other = shape;
    other.grams.folds = folds;
    other.grams.repeats = 1;
    return fits(other, available);
  };
  const auto with_columns = [&](std::size_t columns) {
    Shape other = shape;
    other.grams.n_columns = columns;
    return fits(other, available);
  };
  const bool may_choose_folds = !plan.data.fold;
  if (const auto repeats = largest_fitting(1, shape.grams.repeats - 1, with_repeats))
    return {"search.repeats", "search.repeats = " + std::to_string(*repeats) + " fits"};
  const std::string once = shape.grams.repeats > 1 ? " with search.repeats = 1" : "";
  if (const auto folds = largest_fitting(3, shape.grams.folds - 1, with_folds); folds && may_choose_folds)
    return {"search.folds", "search.folds = " + std::to_string(*folds) + once + " fits"};
  const std::size_t columns = shape.grams.n_columns;
  if (const auto fewer = largest_fitting(1, columns - 1, with_columns))
    return {"forms.default", "forms that make at most " + std::to_string(*fewer) + " columns instead of " +
                                 std::to_string(columns) + " fit"};
  return {"search.pool", "a smaller search.pool and fewer threads (--threads) take less"};
}

}  // namespace

double MemoryNeed::peak() const { return grams + std::max({building, walk + pool, pool + examining}); }

MemoryNeed memory_need(const Prepared& prepared, const run::Plan& plan, unsigned threads) {
  return need_of(shape_of(prepared, plan, threads));
}

Status check_memory(const Prepared& prepared, const run::Plan& plan, unsigned threads,
                    std::optional<std::uint64_t> available) {
  const Shape shape = shape_of(prepared, plan, threads);
  const MemoryNeed need = need_of(shape);
  if (!available || need.peak() <= static_cast<double>(*available)) return {};
  const Advice advice = advice_for(shape, plan, static_cast<double>(*available));
  const std::string message = "the search would need about " + size_words(need.peak()) +
                              " of memory beyond the table, and " + size_words(static_cast<double>(*available)) +
                              " are free: the matrices of " + std::to_string(shape.grams.folds * shape.grams.repeats) +
                              " folds by " + std::to_string(shape.grams.order()) + " columns and responses take " +
                              size_words(need.grams) + ", their construction " + size_words(need.building) +
                              ", the walk " + size_words(need.walk) + ", the pool " + size_words(need.pool) +
                              ", examining " + size_words(need.examining);
  return Error{ErrorKind::plan, message, where_in_plan(plan, advice.key),
               advice.text +
                   "; fewer forms in the longest menus (forms.of), fewer predictors (data.ignore) and fewer threads "
                   "(--threads) take less too"};
}

}  // namespace formsieve::pipeline

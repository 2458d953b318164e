#include "survey/usable.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstdint>
#include <iterator>
#include <unordered_map>

#include "survey/words.hpp"

namespace formsieve::survey {

namespace {

constexpr std::uint64_t kMissingBits = 0x7ff8000000000000;  // one pattern for every NaN

/// Equal for equal values: one zero, one missing.
std::uint64_t cell_bits(double x) { return std::isnan(x) ? kMissingBits : std::bit_cast<std::uint64_t>(x + 0.0); }

/// Calls visit(pattern) for every row; two columns of one type are twins when their patterns agree. Levels are numbered
/// anew by first appearance, so that equal patterns are levels that go one to one.
template <class Visit>
void visit_cells(const table::Column& column, Visit visit) {
  for (const double x : column.numbers) visit(cell_bits(x));
  std::vector<std::uint64_t> place(column.levels.size(), 0);
  std::uint64_t n_seen = 0;
  for (const std::uint32_t code : column.codes) {
    if (code == table::kMissingLevel) {
      visit(kMissingBits);
      continue;
    }
    if (place[code] == 0) place[code] = ++n_seen;
    visit(place[code]);
  }
}

bool same_values(const table::Column& a, const table::Column& b) {
  if (a.type != b.type || a.n_missing != b.n_missing) return false;
  std::vector<std::uint64_t> cells;
  cells.reserve(a.numbers.size() + a.codes.size());
  visit_cells(a, [&](std::uint64_t cell) { cells.push_back(cell); });
  std::size_t row = 0;
  bool same = true;
  visit_cells(b, [&](std::uint64_t cell) { same = same && row < cells.size() && cells[row++] == cell; });
  return same && row == cells.size();
}

/// Finds candidates for same_values: FNV-1a over whole cells, its high bits folded down.
std::uint64_t hash_of(const table::Column& column) {
  std::uint64_t hash = 14695981039346656037U;
  visit_cells(column, [&](std::uint64_t cell) {
    hash = (hash ^ cell) * 1099511628211U;
    hash ^= hash >> 29;
  });
  return hash;
}

std::string twin_text(const table::Column& twin, bool is_response) {
  if (is_response) return "it repeats the response '" + twin.name + "' in every row, and would explain it by itself";
  if (twin.type == table::ColumnType::text)
    return "its levels go one to one with those of '" + twin.name + "', so it adds nothing beside it";
  return "it holds the same value as '" + twin.name + "' in every row, so it adds nothing beside it";
}

}  // namespace

std::vector<std::size_t> count_levels(const table::Column& column) {
  std::vector<std::size_t> counts(column.levels.size(), 0);
  for (const std::uint32_t code : column.codes)
    if (code != table::kMissingLevel) ++counts[code];
  return counts;
}

std::optional<std::string> unusable_reason(std::span<const double> present) {
  if (present.empty()) return "it has no values";
  const auto [low, high] = std::minmax_element(present.begin(), present.end());
  if (*low != *high) return std::nullopt;
  return "it holds one value only, " + readable(*low);
}

std::optional<std::string> unusable_reason(const table::Column& column, std::size_t rare_level_count) {
  const std::vector<std::size_t> counts = count_levels(column);
  std::size_t n = 0;
  std::size_t n_levels = 0;
  std::size_t n_frequent = 0;
  for (const std::size_t count : counts) {
    n += count;
    n_levels += count > 0 ? 1 : 0;
    n_frequent += count > 0 && count >= rare_level_count ? 1 : 0;
  }
  if (n == 0) return "it has no values";
  if (n_levels == 1) return "it holds one level only";
  if (static_cast<double>(n_levels) > kMostLevelsPerRow * static_cast<double>(n))
    return "it has nearly as many levels as rows (" + std::to_string(n_levels) + " levels on " + std::to_string(n) +
           " rows, more than one for every two), so it names rows rather than kinds of rows (a rule of common "
           "practice)";
  if (n_frequent == 0 && n_levels > 2)
    return "every one of its " + std::to_string(n_levels) + " levels is rare (on fewer than " +
           std::to_string(rare_level_count) +
           " rows), so that pooling would leave no kinds of rows to compare (data.rare_levels sets the limit)";
  return std::nullopt;
}

std::map<std::string, std::string> twin_reasons(const table::Table& table, const std::vector<std::size_t>& included,
                                                const std::string& response) {
  std::vector<std::size_t> order = included;
  // The response comes first, so that its copies are named after it.
  std::stable_partition(order.begin(), order.end(), [&](std::size_t i) { return table.columns[i].name == response; });
  std::unordered_multimap<std::uint64_t, std::size_t> seen;
  std::map<std::string, std::string> reasons;
  for (const std::size_t index : order) {
    const table::Column& column = table.columns[index];
    const std::uint64_t hash = hash_of(column);
    const auto [first, last] = seen.equal_range(hash);
    const auto twin =
        std::find_if(first, last, [&](const auto& other) { return same_values(column, table.columns[other.second]); });
    if (twin == last) {
      seen.emplace(hash, index);
      continue;
    }
    const table::Column& original = table.columns[twin->second];
    reasons.emplace(column.name, twin_text(original, original.name == response));
  }
  return reasons;
}

std::vector<std::size_t> included_columns(const table::Table& table, const Options& options) {
  std::vector<std::size_t> included;
  for (std::size_t i = 0; i < table.columns.size(); ++i)
    if (std::find(options.ignore.begin(), options.ignore.end(), table.columns[i].name) == options.ignore.end())
      included.push_back(i);
  return included;
}

std::map<std::string, std::string> unusable_columns(const table::Table& table, const Options& options) {
  const std::vector<std::size_t> included = included_columns(table, options);
  std::map<std::string, std::string> reasons;
  for (const std::size_t index : included) {
    const table::Column& column = table.columns[index];
    std::optional<std::string> reason;
    if (column.type == table::ColumnType::text) {
      reason = unusable_reason(column, options.rare_level_count);
    } else {
      std::vector<double> present;
      std::copy_if(column.numbers.begin(), column.numbers.end(), std::back_inserter(present),
                   [](double x) { return !std::isnan(x); });
      reason = unusable_reason(present);
    }
    if (reason && column.name != options.response) reasons.emplace(column.name, *reason);
  }
  reasons.merge(twin_reasons(table, included, options.response));
  return reasons;
}

}  // namespace formsieve::survey

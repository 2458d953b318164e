#include "design/design.hpp"
#include "design/random.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

namespace formsieve::design {

namespace {

Error fold_error(ErrorKind kind, std::string message, std::string where, std::string hint) {
  return {kind, std::move(message), std::move(where), std::move(hint)};
}

/// Rank of each row's value among the distinct values of a column, in rising order: of numbers, or of texts by their
/// bytes.
Result<std::vector<std::uint32_t>> ranks(const table::Column& column, std::span<const std::size_t> table_rows) {
  const auto missing = [&](std::size_t row) {
    return fold_error(ErrorKind::data, "the folds need a value of '" + column.name + "' on every row in use",
                      "table row " + std::to_string(row + 1) + ", column '" + column.name + "'",
                      "fill in the value or remove the row");
  };
  const bool numeric = column.type == table::ColumnType::numeric;
  std::vector<std::uint32_t> rank_of_level(column.levels.size());
  if (!numeric) {
    std::vector<std::uint32_t> by_text(column.levels.size());
    std::iota(by_text.begin(), by_text.end(), 0U);
    std::sort(by_text.begin(), by_text.end(),
              [&](std::uint32_t a, std::uint32_t b) { return column.levels[a] < column.levels[b]; });
    for (std::uint32_t i = 0; i < by_text.size(); ++i) rank_of_level[by_text[i]] = i;
  }
  std::vector<double> values;
  for (const std::size_t row : table_rows) {
    if (numeric ? std::isnan(column.numbers[row]) : column.codes[row] == table::kMissingLevel) return missing(row);
    values.push_back(numeric ? column.numbers[row] : static_cast<double>(rank_of_level[column.codes[row]]));
  }
  std::vector<double> distinct = values;
  std::sort(distinct.begin(), distinct.end());
  distinct.erase(std::unique(distinct.begin(), distinct.end()), distinct.end());
  std::vector<std::uint32_t> result;
  for (const double value : values)
    result.push_back(
        static_cast<std::uint32_t>(std::lower_bound(distinct.begin(), distinct.end(), value) - distinct.begin()));
  return result;
}

std::size_t n_distinct(const std::vector<std::uint32_t>& ranks) {
  return *std::max_element(ranks.begin(), ranks.end()) + std::size_t{1};
}

/// Each repeat has a stream of its own; the first is the seed's.
SplitMix64 stream(std::uint64_t seed, std::size_t repeat) {
  if (repeat == 0) return SplitMix64(seed);
  SplitMix64 derive(seed ^ static_cast<std::uint64_t>(repeat) * 0xd1b54a32d192ed03U);
  return SplitMix64(derive.next());
}

std::vector<std::uint32_t> deal_rows(std::size_t n_rows, std::size_t n_folds, SplitMix64 random) {
  std::vector<std::uint32_t> order(n_rows);
  std::iota(order.begin(), order.end(), 0U);
  shuffle(std::span(order), random);
  std::vector<std::uint32_t> fold_of(n_rows);
  for (std::size_t i = 0; i < n_rows; ++i) fold_of[order[i]] = static_cast<std::uint32_t>(i % n_folds);
  return fold_of;
}

std::vector<std::uint32_t> deal_groups(const std::vector<std::uint32_t>& group_of, std::size_t n_folds,
                                       SplitMix64 random) {
  const std::size_t n_groups = n_distinct(group_of);
  std::vector<std::size_t> group_size(n_groups, 0);
  for (const std::uint32_t group : group_of) ++group_size[group];
  std::vector<std::uint32_t> order(n_groups);
  std::iota(order.begin(), order.end(), 0U);
  shuffle(std::span(order), random);
  std::vector<std::size_t> fold_size(n_folds, 0);
  std::vector<std::uint32_t> fold_of_group(n_groups);
  for (const std::uint32_t group : order) {
    const auto smallest = std::min_element(fold_size.begin(), fold_size.end());
    *smallest += group_size[group];
    fold_of_group[group] = static_cast<std::uint32_t>(smallest - fold_size.begin());
  }
  std::vector<std::uint32_t> fold_of;
  for (const std::uint32_t group : group_of) fold_of.push_back(fold_of_group[group]);
  return fold_of;
}

std::vector<std::uint32_t> cut_blocks(const std::vector<std::uint32_t>& rank_of, std::size_t n_folds) {
  std::vector<std::uint32_t> order(rank_of.size());
  std::iota(order.begin(), order.end(), 0U);
  std::stable_sort(order.begin(), order.end(),
                   [&](std::uint32_t a, std::uint32_t b) { return rank_of[a] < rank_of[b]; });
  std::vector<std::uint32_t> fold_of(rank_of.size());
  for (std::size_t i = 0; i < order.size(); ++i)
    fold_of[order[i]] = static_cast<std::uint32_t>(i * n_folds / order.size());
  return fold_of;
}

Status check_request(const FoldRequest& request) {
  const int columns = (request.group != nullptr) + (request.order != nullptr) + (request.given != nullptr);
  if (columns > 1)
    return fold_error(ErrorKind::plan, "folds can follow only one of a group, an order and a fold column", "data",
                      "keep one of the keys group, order and fold");
  if (request.repeats == 0)
    return fold_error(ErrorKind::plan, "there must be at least one repeat of the folds", "search.repeats",
                      "repeats = 1");
  if (request.count < 2 && request.given == nullptr)
    return fold_error(ErrorKind::plan, "there must be at least two folds", "search.folds", "folds = 10");
  if (request.repeats > 1 && (request.order != nullptr || request.given != nullptr))
    return fold_error(ErrorKind::plan,
                      request.order != nullptr ? "folds that are blocks of an order cannot be repeated"
                                               : "folds given by a column cannot be repeated",
                      "search.repeats", "repeats = 1");
  return {};
}

std::string used_instead(std::size_t asked, std::size_t available, const std::string& of_what) {
  return std::to_string(asked) + " folds asked for, " + std::to_string(available) + " " + of_what + ": " +
         std::to_string(available) + " used";
}

/// The number of folds that the rows or groups allow, with a remark when it is not what was asked for.
Result<std::size_t> settle_count(std::size_t asked, std::size_t available, const std::string& of_what, Folds& folds) {
  if (available < 2)
    return fold_error(ErrorKind::data,
                      "cross-validation needs at least two " + of_what + ", and there " +
                          (available == 0 ? "are none" : "is only one"),
                      "", "use a table with more " + of_what);
  if (available < asked) folds.remarks.push_back(used_instead(asked, available, of_what));
  return std::min(asked, available);
}

}  // namespace

Result<Folds> make_folds(std::span<const std::size_t> table_rows, const FoldRequest& request) {
  if (const Status status = check_request(request); !status) return status.error();
  Folds folds;
  folds.repeats = request.repeats;
  folds.seed = request.seed;
  const table::Column* column = request.group ? request.group : request.order ? request.order : request.given;
  std::vector<std::uint32_t> rank_of;
  if (column != nullptr && !table_rows.empty()) {
    auto found = ranks(*column, table_rows);
    if (!found) return found.error();
    rank_of = std::move(*found);
  }
  const bool by_values = request.group != nullptr || request.given != nullptr;
  const std::size_t available = table_rows.empty() ? 0 : by_values ? n_distinct(rank_of) : table_rows.size();
  const std::string of_what = !by_values ? "rows" : "different values of '" + column->name + "'";
  const auto count = settle_count(request.given ? available : request.count, available, of_what, folds);
  if (!count) return count.error();
  folds.count = *count;

  if (request.given != nullptr) {
    folds.kind = FoldKind::given;
    folds.fold_of = {rank_of};
  } else if (request.order != nullptr) {
    folds.kind = FoldKind::ordered;
    folds.fold_of = {cut_blocks(rank_of, folds.count)};
  } else {
    folds.kind = request.group != nullptr ? FoldKind::grouped : FoldKind::shuffled;
    for (std::size_t repeat = 0; repeat < request.repeats; ++repeat) {
      const SplitMix64 random = stream(request.seed, repeat);
      folds.fold_of.push_back(request.group != nullptr ? deal_groups(rank_of, folds.count, random)
                                                       : deal_rows(table_rows.size(), folds.count, random));
    }
  }
  return folds;
}

}  // namespace formsieve::design

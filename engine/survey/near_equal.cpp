#include <formsieve/survey.hpp>

#include <algorithm>
#include <cmath>
#include <functional>
#include <iterator>
#include <numeric>
#include <optional>
#include <span>

#include "base/sums.hpp"
#include "survey/moments.hpp"
#include "survey/words.hpp"

namespace formsieve::survey {

namespace {

/// Columns that correlate beyond this give fits that no table of a few hundred rows can tell apart: at 0.9999 the one
/// explains all but 0.02 % of the other's variance. A judgement, not a published value.
constexpr double kNearEqualCorrelation = 0.9999;
constexpr int kCorrelationDigits = 7;

/// One entry's column on the rows, centred and of length 1; empty when it is constant, has several columns or is no
/// function of numbers.
struct UnitColumn {
  std::vector<double> values;
  bool finite = true;
};

UnitColumn unit_column(const forms::Form& form, std::span<const double> rows) {
  UnitColumn out;
  if (form.kind == forms::Kind::levels || rows.empty()) return out;
  const std::size_t n_columns = forms::n_columns(form);
  std::vector<double> values(rows.size() * n_columns);
  forms::evaluate_column(form, rows, values);
  out.finite = std::all_of(values.begin(), values.end(), [](double x) { return std::isfinite(x); });
  if (!out.finite || n_columns != 1) return out;
  out.values = deviations(values).values;
  const double length = std::sqrt(base::sum_of_squares(out.values, 0.0));
  if (length == 0.0) return {};
  for (double& d : out.values) d /= length;
  return out;
}

double correlation(const UnitColumn& a, const UnitColumn& b) {
  std::vector<double> products(a.values.size());
  std::transform(a.values.begin(), a.values.end(), b.values.begin(), products.begin(), std::multiplies<>());
  return base::sum(products);
}

std::string near_equal_text(double r) {
  return "their columns correlate " + rounded(std::clamp(r, -1.0, 1.0), kCorrelationDigits) +
         " on these rows, beyond 0.9999 in size: one form, the simpler kept";
}

forms::Struck overflowing(const std::string& label) {
  return {label, "some of its values on these rows are beyond the range of numbers",
          "measure the column in larger or smaller units, or take the form off its menu"};
}

/// Places of the entries, the simplest form first.
std::vector<std::size_t> by_complexity(const std::vector<forms::MenuEntry>& entries) {
  std::vector<std::size_t> order(entries.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return forms::complexity(entries[a].form) < forms::complexity(entries[b].form);
  });
  return order;
}

/// The first kept entry whose column is nearly that of `entry`.
std::optional<std::size_t> near_twin(const std::vector<UnitColumn>& columns, const std::vector<std::size_t>& kept,
                                     std::size_t entry) {
  if (columns[entry].values.empty()) return std::nullopt;
  for (const std::size_t other : kept)
    if (!columns[other].values.empty() && std::abs(correlation(columns[entry], columns[other])) > kNearEqualCorrelation)
      return other;
  return std::nullopt;
}

}  // namespace

forms::Menu merge_near_equal(forms::Menu menu, const std::vector<double>& values, const std::string& column) {
  std::vector<double> rows;
  std::copy_if(values.begin(), values.end(), std::back_inserter(rows), [](double x) { return !std::isnan(x); });
  std::vector<UnitColumn> columns;
  for (const forms::MenuEntry& entry : menu.entries) columns.push_back(unit_column(entry.form, rows));
  const auto name = [&](std::size_t entry) { return forms::term_name(menu.entries[entry].form, column); };

  std::vector<std::size_t> kept;
  for (const std::size_t entry : by_complexity(menu.entries)) {
    if (!columns[entry].finite) {
      menu.struck.push_back(overflowing(name(entry)));
    } else if (const auto twin = near_twin(columns, kept, entry)) {
      menu.merged.push_back({name(entry), name(*twin), near_equal_text(correlation(columns[entry], columns[*twin]))});
    } else {
      kept.push_back(entry);
    }
  }

  std::sort(kept.begin(), kept.end());
  std::vector<forms::MenuEntry> entries;
  for (const std::size_t entry : kept) entries.push_back(std::move(menu.entries[entry]));
  menu.entries = std::move(entries);
  return menu;
}

}  // namespace formsieve::survey

#include <algorithm>
#include <cmath>

#include "survey/advice.hpp"
#include "survey/box_cox.hpp"
#include "survey/column_profile.hpp"
#include "survey/medcouple.hpp"
#include "survey/moments.hpp"
#include "survey/order_statistics.hpp"
#include "survey/resolution.hpp"
#include "survey/usable.hpp"

namespace formsieve::survey {

namespace {

constexpr std::size_t kFewestKnots = 3;
constexpr std::size_t kMostKnots = 5;

/// Everything in the facts but the skewness and the bounds. `sorted` is not empty.
void fill_facts(forms::ColumnFacts& facts, std::span<const double> sorted) {
  facts.n = sorted.size();
  facts.min = sorted.front();
  facts.max = sorted.back();
  const auto [first_zero, first_positive] = std::equal_range(sorted.begin(), sorted.end(), 0.0);
  facts.n_negative = static_cast<std::size_t>(first_zero - sorted.begin());
  facts.n_zero = static_cast<std::size_t>(first_positive - first_zero);
  facts.n_distinct = count_distinct(sorted);
  facts.resolution = resolution(sorted);
  facts.whole = facts.resolution == 1.0;
  for (std::size_t n_knots = kFewestKnots; n_knots <= kMostKnots; ++n_knots)
    for (const double probability : forms::spline_probabilities(n_knots))
      facts.spline_knots[n_knots].push_back(quantile(sorted, probability));
}

void fill_bounds(forms::ColumnFacts& facts, const std::optional<std::pair<double, double>>& bounds) {
  if (!bounds) return;
  if (std::isfinite(bounds->first)) facts.lower_bound = bounds->first;
  if (std::isfinite(bounds->second)) facts.upper_bound = bounds->second;
}

/// `present` in row order.
void fill_moments(ColumnProfile& profile, std::span<const double> present) {
  const Moments of = moments(present);
  profile.mean = of.mean;
  profile.sd = of.sd;
  profile.facts.skewness = of.skewness;
  profile.excess_kurtosis = of.excess_kurtosis;
  profile.skew = forms::skew_class(of.skewness);
  const bool skewed = profile.skew != forms::SkewClass::none;
  profile.direction = !skewed ? "none" : of.skewness > 0.0 ? "right" : "left";
}

/// Returns whether outlying values had to be judged by the mean deviation.
bool fill_order_statistics(ColumnProfile& profile, std::span<const double> sorted) {
  profile.q1 = quantile(sorted, 0.25);
  profile.median = quantile(sorted, 0.5);
  profile.q3 = quantile(sorted, 0.75);
  profile.medcouple = medcouple(sorted);
  const Outlying outlying = count_outlying(sorted);
  profile.n_outlying = outlying.n;
  if (sorted.front() > 0.0) profile.box_cox_lambda = box_cox_lambda(sorted);
  return outlying.by_mean_deviation;
}

}  // namespace

ColumnProfile profile_number_column(const std::string& name, std::vector<double> values,
                                    std::optional<std::pair<double, double>> bounds, Role role) {
  ColumnProfile profile;
  profile.facts.name = name;
  profile.direction = "none";
  fill_bounds(profile.facts, bounds);
  profile.n_missing = std::erase_if(values, [](double x) { return std::isnan(x); });
  const std::vector<double>& present = values;
  if (const auto reason = unusable_reason(present)) {
    profile.notes.push_back(*reason);
    profile.set_aside = role == Role::predictor;
  }
  if (present.empty()) return profile;

  std::vector<double> sorted = present;
  std::sort(sorted.begin(), sorted.end());
  fill_facts(profile.facts, sorted);
  fill_moments(profile, present);
  const bool by_mean_deviation = fill_order_statistics(profile, sorted);
  if (profile.facts.n_distinct < 2) return profile;
  profile.forms = try_forms(profile.facts, present, role);
  const std::vector<std::string> more = advice(profile, by_mean_deviation);
  profile.notes.insert(profile.notes.end(), more.begin(), more.end());
  return profile;
}

ColumnProfile profile_numbers(const std::string& name, std::vector<double> values,
                              std::optional<std::pair<double, double>> bounds) {
  return profile_number_column(name, std::move(values), bounds, Role::predictor);
}

}  // namespace formsieve::survey

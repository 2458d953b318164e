#include "checks/brown_forsythe.hpp"

#include "checks/spread.hpp"
#include "checks/words.hpp"

#include <boost/math/distributions/fisher_f.hpp>

#include <algorithm>
#include <array>

namespace formsieve::checks {

namespace {

double median(Eigen::VectorXd values) {
  const auto middle = values.begin() + values.size() / 2;
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return 0.5 * (*middle + *std::max_element(values.begin(), middle));
}

}  // namespace

std::optional<BrownForsythe> brown_forsythe(const Eigen::Ref<const Eigen::VectorXd>& x,
                                            std::span<const std::vector<Eigen::Index>> groups) {
  BrownForsythe result;
  double within = 0.0;
  double between = 0.0;
  double rows = 0.0;
  double mean = 0.0;  // of all deviations so far
  for (const auto& group : groups) {
    if (group.empty()) return std::nullopt;
    const Eigen::VectorXd chosen = x(group);
    const Eigen::VectorXd deviations = (chosen.array() - median(chosen)).abs();
    const double of_group = deviations.mean();
    const double count = static_cast<double>(group.size());
    within += (deviations.array() - of_group).square().sum();
    // the sum of squares between groups grows with each group by its distance from those before
    between += (of_group - mean) * (of_group - mean) * rows * count / (rows + count);
    mean += (of_group - mean) * count / (rows + count);
    rows += count;
    result.deviation.push_back(of_group);
  }
  result.df1 = static_cast<double>(groups.size()) - 1.0;
  result.df2 = rows - static_cast<double>(groups.size());
  constexpr double kNoVariation = 1e-24;  // of the squared mean: rounding of equal deviations
  if (!(result.df1 > 0.0) || !(result.df2 > 0.0) || !(within > kNoVariation * rows * mean * mean)) return std::nullopt;
  result.f = (between / result.df1) / (within / result.df2);
  const boost::math::fisher_f distribution(result.df1, result.df2);
  result.p = boost::math::cdf(boost::math::complement(distribution, result.f));
  return result;
}

Check equal_spread_by_thirds(const Workings& workings) {
  Check check = named("equal-spread-by-thirds", "Brown–Forsythe, over thirds of the fitted values",
                      "the residuals spread equally in the bottom, middle and top third of fitted values");
  check.size = 1.0;
  check.size_words = "too few rows or fitted values to compare thirds";
  if (!workings.untestable.empty()) {
    check.note = workings.untestable;
    return check;
  }
  if (workings.p < 2 || workings.n / 3 < kFewestRowsInThird) {
    check.note = workings.p < 2 ? "no term, so one fitted value" : "too few rows for three groups";
    return check;
  }
  const Thirds thirds = thirds_of(workings.subject.fitted);
  const std::array groups{thirds.bottom, thirds.middle, thirds.top};
  // over the largest: the squares of residuals near 1e±150 must stay numbers
  const auto test = brown_forsythe(workings.residuals / workings.residuals.lpNorm<Eigen::Infinity>(), groups);
  if (!test) {
    check.note = "the residuals of a third are all equally far from their median";
    return check;
  }
  check.statistic = test->f;
  check.df = test->df1;
  check.df2 = test->df2;
  check.p = test->p;
  const auto [low, high] = std::minmax_element(test->deviation.begin(), test->deviation.end());
  check.size = bounded_ratio(*high, *low).value_or(1.0);
  check.size_words = "the third of fitted values with the widest residuals has " + number_words(check.size) +
                     " times the spread of the narrowest";
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

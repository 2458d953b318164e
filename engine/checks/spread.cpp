#include "checks/spread.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace formsieve::checks {

namespace {

double standard_deviation(const Eigen::VectorXd& residuals, const std::vector<Eigen::Index>& rows) {
  const Eigen::VectorXd chosen = residuals(rows);
  return centred(chosen).stableNorm() / std::sqrt(static_cast<double>(rows.size()) - 1.0);
}

}  // namespace

Thirds thirds_of(const Eigen::Ref<const Eigen::VectorXd>& value) {
  const Eigen::Index n = value.size();
  const Eigen::Index third = n / 3;
  Thirds thirds;
  if (third == 0) {
    thirds.middle.resize(static_cast<std::size_t>(n));
    std::iota(thirds.middle.begin(), thirds.middle.end(), Eigen::Index{0});
    return thirds;
  }
  Eigen::VectorXd sorted = value;
  std::nth_element(sorted.begin(), sorted.begin() + (third - 1), sorted.end());
  const double bottom_edge = sorted[third - 1];
  std::nth_element(sorted.begin() + third, sorted.begin() + (n - third), sorted.end());
  const double top_edge = sorted[n - third];
  // of the rows at an edge the first belong to the bottom, the last to the top
  Eigen::Index at_bottom = third - (value.array() < bottom_edge).count();
  Eigen::Index not_at_top = (value.array() >= top_edge).count() - third;
  for (Eigen::Index row = 0; row < n; ++row) {
    const bool bottom = value[row] < bottom_edge || (value[row] == bottom_edge && at_bottom-- > 0);
    const bool top = value[row] > top_edge || (value[row] == top_edge && not_at_top-- <= 0);
    (bottom ? thirds.bottom : top ? thirds.top : thirds.middle).push_back(row);
  }
  return thirds;
}

std::optional<double> bounded_ratio(double high, double low) {
  if (low == 0.0 && high == 0.0) return std::nullopt;
  return low == 0.0 ? kLargestRatio : std::clamp(high / low, 1.0 / kLargestRatio, kLargestRatio);
}

std::optional<double> spread_ratio(const Workings& workings, const Eigen::Ref<const Eigen::VectorXd>& value) {
  if (workings.n / 3 < kFewestRowsInThird || workings.p < 2) return std::nullopt;
  const Thirds thirds = thirds_of(value);
  return bounded_ratio(standard_deviation(workings.residuals, thirds.top),
                       standard_deviation(workings.residuals, thirds.bottom));
}

double unevenness(double ratio) { return std::max(ratio, 1.0 / ratio); }

Eigen::VectorXd centred_squares(const Workings& workings) {
  Eigen::VectorXd squares = (workings.residuals / workings.residuals.lpNorm<Eigen::Infinity>()).array().square();
  squares /= squares.mean();
  squares = centred(squares);
  constexpr double kAllEqual = 1e-12;  // relative; two rows, or one two-valued column, make them equal by algebra
  if (squares.lpNorm<Eigen::Infinity>() <= kAllEqual) return {};
  return squares;
}

}  // namespace formsieve::checks

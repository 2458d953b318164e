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
  std::vector<Eigen::Index> rows(static_cast<std::size_t>(n));
  std::iota(rows.begin(), rows.end(), Eigen::Index{0});
  const auto before = [&](Eigen::Index a, Eigen::Index b) {
    return value[a] < value[b] || (value[a] == value[b] && a < b);
  };
  const auto bottom_end = rows.begin() + third;
  const auto top_begin = rows.end() - third;
  std::nth_element(rows.begin(), bottom_end, rows.end(), before);
  std::nth_element(bottom_end, top_begin, rows.end(), before);
  Thirds thirds{{rows.begin(), bottom_end}, {bottom_end, top_begin}, {top_begin, rows.end()}};
  // row order, so that sums do not depend on how a library partitions
  for (auto* part : {&thirds.bottom, &thirds.middle, &thirds.top}) std::sort(part->begin(), part->end());
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

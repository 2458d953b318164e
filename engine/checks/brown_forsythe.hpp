// Equality of spread over groups of rows.
#pragma once

#include <Eigen/Core>

#include <optional>
#include <span>
#include <vector>

namespace formsieve::checks {

struct BrownForsythe {
  double f = 0.0;
  double df1 = 0.0, df2 = 0.0;  ///< groups − 1, rows − groups
  double p = 1.0;
  std::vector<double> deviation;  ///< [groups] mean absolute deviation from the group's median
};

/// Brown & Forsythe 1974: one-way analysis of variance of |x − median of its group|. `groups`: row indices. Unset when
/// a group is empty, or when the deviations do not vary within groups. Cost O(n).
std::optional<BrownForsythe> brown_forsythe(const Eigen::Ref<const Eigen::VectorXd>& x,
                                            std::span<const std::vector<Eigen::Index>> groups);

}  // namespace formsieve::checks

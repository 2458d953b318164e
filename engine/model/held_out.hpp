// Many held-out residuals condensed to a few of their order statistics.
#pragma once

#include <formsieve/model.hpp>

#include <cstddef>
#include <vector>

namespace formsieve::model {

/// Order statistics of a fold that are kept at most.
inline constexpr std::size_t kMostHeldOut = 1001;

/// A fold's record. Up to kMostHeldOut residuals are kept as they are. Of more, order statistics are kept and each
/// stands for the rows between it and the one before: every residual is replaced by one that is not smaller, so that no
/// interval becomes narrower. Most of them lie where intervals of 90 to 99 % end; there a replaced residual is one of
/// the next ranks, at a distance of about a ten-thousandth of the rows.
/// `residuals` rising, not negative.
Fold fold_record(std::vector<double> coefficients, std::vector<double> residuals);

}  // namespace formsieve::model

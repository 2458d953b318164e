// Private to room fit: the S estimate of a regression (Rousseeuw & Yohai 1984) by fast-S.
#pragma once

#include "fit/m_estimate.hpp"

#include <optional>

namespace formsieve::fit {

struct SEstimate {
  Eigen::VectorXd delta;
  double scale = 0.0;  ///< M-scale of all rows at delta
};

/// The δ whose residuals have the smallest M-scale, as far as fast-S finds it (Salibian-Barrera & Yohai 2006):
/// candidates through p independent rows each, two steps of local improvement, the best five improved to the end.
/// Seeded, so the same every time. Unset when no candidate is found or the scale is 0. Cost as robust_fit says.
std::optional<SEstimate> s_estimate(const Rows& rows);

/// Candidates drawn so that with 999 chances in 1,000 one is free of bad rows when 30 % are bad: 16 for p = 3, 241 for
/// p = 10. At least 50, at most 300; the local improvement makes up for the rest.
std::size_t n_candidates(Eigen::Index p);

}  // namespace formsieve::fit

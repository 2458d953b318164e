// Variance inflation of terms.
#pragma once

#include "checks/workings.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::checks {

/// Generalised variance inflation of each term on the scale of one column: GVIF^(1/df) with
/// GVIF = det R_jj · det (R⁻¹)_jj, R the correlation matrix of all columns (Fox & Monette 1992). For a term of one
/// column this is the ordinary variance inflation. `term_first`: first design column of each term, counted with the
/// intercept as column 0, rising; a term ends where the next begins. Requires basis.full_rank. Cost O(k³).
std::vector<double> inflations(const Basis& basis, std::span<const std::size_t> term_first);

}  // namespace formsieve::checks

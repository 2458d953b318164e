// The pilot of each response form: predictions about which held-out errors are carried to own units, to first order.
#pragma once

#include <formsieve/base.hpp>

#include "base/gram.hpp"
#include "design/own_units.hpp"
#include "pipeline/prepare.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

namespace formsieve::pipeline {

/// Candidates whose median is the pilot. One alone may extrapolate wildly on a row, which then decides the whole
/// screen; the median of a few dozen good ones does not.
inline constexpr std::size_t kPilotCandidates = 25;

/// Whether a response form's scale is own units up to a constant slope: it needs no pilot.
bool is_linear(const forms::Form& response);

/// The pilot of one response form: the median, row by row, of the predictions of good `candidates` of it (at most
/// kPilotCandidates are used), or, where none are given, of the best that a descent meets (search::descend).
/// Predictions p of a row come from refits without its fold, once a repeat; the back-transform H smears the residuals
/// of the medians of the refits on all rows, and its slope is a central difference.
///
/// Rows where H or its slope does not exist at p, or where the slope is more than kSlopeRange times larger or smaller
/// than the median slope, take the p, H(p) and H′(p) of the row with the nearest p where they do. Nothing when no
/// candidate can be fitted in every fold or no row has a slope. The same for any number of threads. Cost that of
/// examining kPilotCandidates candidates.
std::optional<design::Pilot> make_pilot(const Prepared& prepared, const base::GramSet& grams, std::size_t response,
                                        unsigned threads, std::span<const search::Choice> candidates = {});
inline constexpr double kSlopeRange = 1e6;
/// Beyond so many design columns a descent from nothing takes minutes.
inline constexpr std::size_t kMostDescendedColumns = 300;

/// Makes the pilots of all response forms that need one and fills grams.own_units. Response forms without a pilot are
/// left out of it, and so are those without any of the `candidates` by response form, when some are given and a descent
/// would be dear (kMostDescendedColumns).
Status add_own_units(const Prepared& prepared, base::GramSet& grams, unsigned threads,
                     std::span<const std::vector<search::Choice>> candidates = {});

}  // namespace formsieve::pipeline

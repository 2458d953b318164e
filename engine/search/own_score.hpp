// Held-out error in own units, to first order, of listed candidates (base::GramSet::OwnUnits).
#pragma once

#include "base/gram.hpp"
#include "search/candidate_fit.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace formsieve::search {

/// Sums over all held-out rows and repeats, in own units squared, hence comparable across response forms; infinite for
/// a candidate that is inseparable in a fold.
struct OwnScores {
  double pilot_weight = 0.0;
  double working_response = 0.0;
};

/// The matrices of a response, or null where its scale is own units already.
const base::GramSet::OwnUnits* own_units_of(const base::GramSet& grams, std::size_t response);

/// Adds the standardised sums of fold f of a candidate whose coefficients there `fit` holds.
void add_own_sums(const base::GramSet& grams, const base::GramSet::OwnUnits& own, std::size_t f,
                  std::span<const std::size_t> columns, const CandidateFit& fit, OwnScores& sums);
/// The scores that sums over all folds are.
OwnScores own_scores_of(const base::GramSet::OwnUnits& own, const OwnScores& sums);

/// Scores of candidates whose response has own-units matrices, in the order given; the same bits for any number of
/// threads. Cost O(k³) per candidate and fold for k columns.
std::vector<OwnScores> own_scores(const Space& space, const base::GramSet& grams, std::span<const Choice> candidates,
                                  unsigned threads);

}  // namespace formsieve::search

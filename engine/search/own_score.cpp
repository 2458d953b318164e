#include "search/own_score.hpp"

#include "base/parallel.hpp"
#include "search/candidate_fit.hpp"

#include <algorithm>
#include <cassert>
#include <limits>

namespace formsieve::search {

namespace {

/// Candidates that one worker scores at a time: a millisecond or so.
constexpr std::size_t kGrain = 256;

OwnScores score(const base::GramSet& grams, const base::GramSet::OwnUnits& own, std::span<const std::size_t> columns,
                CandidateFit& fit) {
  constexpr double kInfinity = std::numeric_limits<double>::infinity();
  OwnScores sums;
  for (std::size_t f = 0; f < grams.n_folds; ++f) {
    if (!fit.solve(grams.training[f], grams.order(), columns, grams.n_columns + own.response))
      return {kInfinity, kInfinity};
    add_own_sums(grams, own, f, columns, fit, sums);
  }
  return own_scores_of(own, sums);
}

}  // namespace

void add_own_sums(const base::GramSet& grams, const base::GramSet::OwnUnits& own, std::size_t f,
                  std::span<const std::size_t> columns, const CandidateFit& fit, OwnScores& sums) {
  const std::size_t y = grams.n_columns;
  const std::size_t shift = grams.n_columns + 1;
  const std::size_t order = grams.n_columns + 2;
  const std::vector<double>& validation = own.validation[f];
  const double weighted = fit.held_out_sse(validation, order, columns, y);
  sums.pilot_weight += weighted;
  sums.working_response +=
      weighted + 2.0 * fit.held_out_product(validation, order, columns, y, shift) + validation[shift + shift * order];
}

OwnScores own_scores_of(const base::GramSet::OwnUnits& own, const OwnScores& sums) {
  // rounding can carry an exact fit below zero
  return {std::max(sums.pilot_weight, 0.0) * own.sse_factor, std::max(sums.working_response, 0.0) * own.sse_factor};
}

const base::GramSet::OwnUnits* own_units_of(const base::GramSet& grams, std::size_t response) {
  for (const auto& own : grams.own_units)
    if (own.response == response) return &own;
  return nullptr;
}

std::vector<OwnScores> own_scores(const Space& space, const base::GramSet& grams, std::span<const Choice> candidates,
                                  unsigned threads) {
  std::vector<OwnScores> scores(candidates.size());
  base::parallel_for((candidates.size() + kGrain - 1) / kGrain, threads, [&](std::size_t part) {
    CandidateFit fit;
    std::vector<std::size_t> columns;
    const std::size_t last = std::min((part + 1) * kGrain, candidates.size());
    for (std::size_t i = part * kGrain; i < last; ++i) {
      const auto* own = own_units_of(grams, candidates[i].response);
      assert(own != nullptr);
      columns_of(space, candidates[i].choice, columns);
      scores[i] = score(grams, *own, columns, fit);
    }
  });
  return scores;
}

}  // namespace formsieve::search

// The whole space in figures: from the walk's by-products to the result types of judge.
#pragma once

#include <formsieve/judge.hpp>

#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"
#include "search/walk.hpp"

#include <vector>

namespace formsieve::pipeline {

/// AIC, or the plan's criterion when that is a sibling of it.
judge::Criterion summary_criterion(judge::Criterion ranked_by);

/// The form profile, the best of each number of terms, the shares of weight and the distribution of scores, from a walk
/// with penalties() of that criterion; empty when it made no summary. Criteria are those of the examination, so that
/// the two can be compared. Shares of weight are unset after a walk that was stopped: what it had not reached may hold
/// most of the weight. Cost: nothing depends on rows or candidates.
judge::SpaceSummary space_summary(const search::WalkResult& walked, const Prepared& prepared,
                                  judge::Criterion ranked_by, const LikelihoodConstants& constants);

}  // namespace formsieve::pipeline

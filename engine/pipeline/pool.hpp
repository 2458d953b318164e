// The pool: what the screen's lists hand to the examination.
//
// Every candidate is screened by held-out error and by criteria on the form's scale; the best of those lists once more
// by two estimates of held-out error in own units, to first order about a pilot (pilot.hpp, base::GramSet::OwnUnits).
// Either alone can miss candidates whose error in own units hangs on a few rows, so the pool is the union of all.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>

#include "base/gram.hpp"
#include "pipeline/prepare.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <span>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// The lists that the screen keeps: for each response form the best by held-out error on the form's scale and by AIC,
/// and by the plan's criterion when that is AICc or BIC. Longer than the pool when a response form has a scale of its
/// own, since they are then scored again in own units.
std::vector<search::PoolRule> pool_rules(const Prepared& prepared, const run::Plan& plan);

/// How long each of these lists is at most.
std::size_t list_length(const Prepared& prepared, std::size_t pool);

/// Candidates of one response form, best first by one score.
struct PoolList {
  enum class Order { cv, criterion, pilot_weight, working_response };
  Order order = Order::cv;
  std::size_t response = 0;
  std::vector<search::Scored> candidates;
  /// [candidates] what they are ordered by, a sum of squared errors: on the form's scale for cv, in own units for the
  /// last two; empty for criterion.
  std::vector<double> sse;
};

/// The lists that the pool is taken from, each as long as the pool at most: the walk's, then for each response form
/// with own-units matrices the best of the walk's lists by pilot weight and by working response. The same for any
/// number of threads.
std::vector<PoolList> pool_lists(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                                 const search::WalkResult& walked, unsigned threads);

/// The union of the lists, taken in turn by depth (the best of every list, then the second of every list, …) until it
/// holds `most` candidates. Depends on the lists alone, hence not on threads. In the order of admission.
std::vector<search::Scored> unite(std::span<const PoolList> lists, std::size_t most);

/// How the pool was formed, in words.
std::string pool_words(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                       const search::WalkResult& walked, std::size_t pooled);

/// How far the first candidates left out of the pool lie behind the best, in words.
std::string margin_words(const Prepared& prepared, std::span<const PoolList> lists, const search::WalkResult& walked,
                         const std::vector<search::Scored>& pool);

}  // namespace formsieve::pipeline

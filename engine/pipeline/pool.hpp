// The pool: what the screen's lists hand to the examination.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>

#include "pipeline/prepare.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// The lists that the screen keeps: for each response form the best by held-out error on the form's scale and by AIC,
/// and by the plan's criterion when that is AICc or BIC.
std::vector<search::PoolRule> pool_rules(const Prepared& prepared, const run::Plan& plan);

/// The union of the lists, taken in turn by depth (the best of every list, then the second of every list, …) until it
/// holds `most` candidates. Depends on the lists alone, hence not on threads. In the order of admission.
std::vector<search::Scored> unite(const search::WalkResult& walked, std::size_t most);

/// How the pool was formed, in words.
std::string pool_words(const Prepared& prepared, const run::Plan& plan, std::size_t pooled);

/// How far the last pooled candidates lie behind the best of their lists, in words.
std::string margin_words(const Prepared& prepared, const search::WalkResult& walked,
                         const std::vector<search::Scored>& pool);

}  // namespace formsieve::pipeline

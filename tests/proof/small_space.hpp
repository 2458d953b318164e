// Small random searches whose candidates can all be scored, and the plain way to do so.
#pragma once

#include "base/gram.hpp"
#include "proof/problem.hpp"
#include "proof/prove.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::test {

/// Owns what a RootGram refers to.
struct SmallSpace {
  search::Space space;
  base::GramSet grams;
  proof::Problem problem;  ///< its pointers are set by connect()
  proof::Restriction restriction;
  std::size_t keep = 1;
  double within = 1e300;

  void connect() {
    problem.space = &space;
    problem.grams = &grams;
  }
};

/// Draws everything from the seed: one to three response forms with constants, predictors with forms of one column, of
/// two and of level indicators, weights, more columns than rows, near-collinear forms and predictors, pure noise,
/// always-in, max_terms, AIC, AICc and BIC, keep and within. At most `most_candidates` candidates.
SmallSpace draw_small_space(std::uint64_t seed, std::size_t most_candidates);

struct Scored {
  search::Choice choice;
  double score = 0.0;
};

/// The score of one candidate from the Gram by Cholesky in long double; +infinity where a pivot is at most 1e-8 of its
/// diagonal.
double plain_score(const SmallSpace& small, const search::Choice& choice);
/// All candidates of the restriction with a finite score, best first, ties by number.
std::vector<Scored> score_all(const SmallSpace& small);
/// The part of them that is to be listed.
std::vector<Scored> expected_list(const SmallSpace& small);

}  // namespace formsieve::test

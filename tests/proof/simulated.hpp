// Simulated searches of skewed predictors, a third of them active: the yardstick of the proof.
#pragma once

#include "base/gram.hpp"
#include "proof/problem.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::test {

struct SimulatedOptions {
  int n_predictors = 8, n_forms = 4, n_rows = 300, seed = 1;
  double r_squared = 0.8;
  double correlation = 0.3;       ///< between neighbours, before the skewing
  double spread = 1.0;            ///< multiplies the variation of every predictor: small makes its forms nearly equal
  int n_active = -1;              ///< −1: a third
  std::string criterion = "AIC";  ///< AIC, AICc or BIC
  int n_responses = 1;            ///< more: beside it √ and the identity of the response of which it is the ln
};

/// Owns what a RootGram refers to.
struct Simulated {
  search::Space space;
  base::GramSet grams;
  proof::Problem problem;
};

/// Form t of predictor p is column p · n_forms + t; the response has unit length, so that scores are n ln(RSS_rel) +
/// penalty, with constants that make response forms comparable where there are more. Penalties of k columns: 2(k + 1);
/// ln(n)(k + 1); 2q + 2q(q + 1)/(n − q − 1), q = k + 2.
Simulated simulate(const SimulatedOptions& options);

std::vector<double> penalty_of(const std::string& criterion, std::size_t n_rows, std::size_t most_columns);

}  // namespace formsieve::test

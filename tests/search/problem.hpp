// Small regression problems for the tests of the walk: rows, their Gram matrices by plain loops, and the explicit refit
// of any candidate, both in long double and neither sharing code with what is tested.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "search/walk.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <random>
#include <vector>

namespace formsieve::test {

struct Problem {
  Eigen::MatrixXd columns;                          ///< [n_rows × n_columns] design columns without intercept
  Eigen::MatrixXd responses;                        ///< [n_rows × n_responses]
  std::vector<double> weights;                      ///< [n_rows] or empty
  std::vector<std::vector<std::uint32_t>> fold_of;  ///< [repeats][n_rows]
  search::Space space;
};

/// What a walk says of one candidate.
struct Refit {
  search::Choice choice;
  double cv_sse = 0.0;  ///< unweighted, over all held-out rows
  double rss = 0.0;     ///< weighted, all rows
  std::size_t n_columns = 0;
};

/// A predictor of the generator: how many columns each of its forms has.
struct Shape {
  std::vector<std::size_t> form_columns;
  bool always = false;
};

/// Columns that are monotone or random functions of positive skewed predictors (forms of one predictor correlate
/// strongly, as real ones do), responses that depend on some of them, and shuffled folds.
Problem make_problem(std::uint64_t seed, std::size_t n_rows, const std::vector<Shape>& shapes, std::size_t n_responses,
                     std::size_t n_folds, std::size_t repeats = 1);

/// Gram matrices by the definition, standardised by the (weighted) standard deviation of all rows.
base::GramSet grams_of(const Problem& problem);

/// Refits one candidate by Householder QR in every fold and on all rows.
Refit refit(const Problem& problem, const search::Choice& choice);
/// All candidates of the space, by counting through the choices.
std::vector<search::Choice> all_choices(const search::Space& space);
std::vector<Refit> refit_all(const Problem& problem);

/// A list of every candidate by held-out error and one by penalised RSS.
search::WalkOptions keep_all(const search::Space& space, double penalty_per_column);

double uniform(std::mt19937_64& random);
double normal(std::mt19937_64& random);

}  // namespace formsieve::test

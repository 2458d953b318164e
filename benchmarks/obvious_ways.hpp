// The same held-out errors by the ways that first come to mind, one candidate at a time.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "simulated.hpp"

#include <cstddef>
#include <cstdint>
#include <string>
#include <vector>

namespace formsieve::bench {

/// The columns of every form and response on all rows, standardised, as the obvious ways find them ready: evaluating
/// forms is not part of the comparison.
struct ReadyColumns {
  std::size_t n_rows = 0, n_columns = 0, n_responses = 0;
  std::vector<double> values;                ///< [n_rows × (n_columns + n_responses)] column-major
  std::vector<std::vector<int>> training;    ///< [n_folds] rows
  std::vector<std::vector<int>> validation;  ///< [n_folds] rows
};

ReadyColumns ready_columns(const Problem& problem);

/// A candidate as the columns of its forms.
struct CandidateColumns {
  std::vector<int> columns;
  int response = 0;  ///< 0 … n_responses − 1
};

/// Candidates drawn at random from the space, within max_terms.
std::vector<CandidateColumns> sample_candidates(const Problem& problem, std::size_t n, std::uint64_t seed);
CandidateColumns columns_of(const Problem& problem, const search::Choice& choice);

// Held-out sums of squared errors over all folds, on the standardised response, of one candidate.
double cv_by_householder(const ReadyColumns& data, const CandidateColumns& candidate);
double cv_by_cholesky(const base::GramSet& grams, const CandidateColumns& candidate);
bool has_lapack();
double cv_by_lapack(const ReadyColumns& data, const CandidateColumns& candidate);  ///< where has_lapack()

/// Seconds for one candidate of k columns by numpy.linalg.lstsq, n_folds fits of n_rows, in a loop; negative where
/// there is no NumPy. Runs python3.
double numpy_seconds(std::size_t n_rows, std::size_t k, std::size_t n_folds);

/// A running sum of cross-products by a library: block is n_rows × n_columns column-major, gram [n_columns²].
void add_by_rank_update(const double* block, std::size_t n_rows, std::size_t stride, std::size_t n_columns,
                        double* gram);

}  // namespace formsieve::bench

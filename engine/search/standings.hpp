// The whole-space summary while it is made: minima that any worker may lower in any order, and sums of weights that are
// kept by part and joined in the order of the parts, so that they are the same bits for any number of threads.
#pragma once

#include "search/space.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <limits>
#include <span>
#include <vector>

namespace formsieve::search {

/// ln Σ exp(x), one term after another.
class LogSum {
 public:
  void add(double log_term);
  double value() const;

 private:
  double largest_ = -std::numeric_limits<double>::infinity();
  double sum_ = 0.0;  ///< of exp(x − largest_)
};

/// Cells of one response: every choice of every predictor, every number of terms, and all candidates.
struct StandingCells {
  explicit StandingCells(const Space& space);
  std::size_t choice(std::size_t predictor, std::size_t choice) const { return first[predictor] + choice; }
  std::size_t terms(std::size_t n_terms) const { return first.back() + n_terms; }
  std::size_t all() const { return n - 1; }

  std::vector<std::size_t> first;  ///< [n_predictors + 1]
  std::size_t n;
};

/// Minima of one worker. [response × cell]
struct BestStandings {
  BestStandings(const StandingCells& cells, std::size_t n_responses);
  void lower(std::size_t at, const double (&figures)[2]);
  void lower(const BestStandings& other);
  std::vector<double> best[2];  ///< held-out SSE; penalised RSS
  std::vector<std::uint64_t> histogram;
};

/// Sums of weights, [response × cell], logarithms.
using WeightLogs = std::vector<double>;

/// The summary of responses [first, first + n) from what the workers and parts found; `scale` by response.
std::vector<ResponseSummary> summarise(const Space& space, const StandingCells& cells, const BestStandings& best,
                                       std::span<const WeightLogs> weights, std::span<const double> scale,
                                       std::size_t n_rows);

/// The unit of Summary::edge as an exponent of two: the next power of two from the empty candidate's held-out SSE on.
int unit_exponent(double empty_cv_sse);
/// The first bin's lower edge as the kernel compares it: the leading bits of the number.
std::int64_t first_bin(int unit_exponent);
/// The bin of a held-out SSE, as the kernel counts it.
std::size_t histogram_bin(double cv_sse, std::int64_t first_bin);

}  // namespace formsieve::search

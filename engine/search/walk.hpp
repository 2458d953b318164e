// The exact elimination walk over every candidate, in plain form.
//
// For fold f, A is the training Gram with the intercept eliminated and V the validation Gram after the same
// elimination. Bringing column c in:
//     A_ij ← A_ij − A_ic A_cj / A_cc
//     V_ij ← V_ij − m_i V_cj − V_ic m_j + m_i m_j V_cc,   m = A_c· / A_cc
// Afterwards A_yy is the training RSS and V_yy the held-out sum of squared errors of that fold, exactly (Furnival &
// Wilson 1974 for the sharing of eliminations along a tree).
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <limits>
#include <stop_token>
#include <vector>

namespace formsieve::search {

/// Which score a list of the pool is ordered by. All are per response form; smaller is better.
enum class Score {
  cv_sse,         ///< held-out sum of squared errors on the form's scale, over all folds and repeats
  penalised_rss,  ///< RSS · exp(penalty[k] / n): orders as AIC, AICc or BIC within one response form
};

struct PoolRule {
  Score score = Score::cv_sse;
  std::size_t keep = 0;  ///< per response form
  std::vector<double>
      penalty;  ///< penalised_rss: criterion penalty by number of design columns k, 0 … most; may hold +infinity
  /// Per response form: candidates of a greater score are not wanted. Standardised, as the Gram matrices are: a sum of
  /// squares on the form's scale over response_scale². Empty: no limit.
  std::vector<double> limit = {};
};

/// What the walk says about a set of candidates of one response form.
struct Standing {
  double best_cv_sse = std::numeric_limits<double>::infinity();         ///< form's scale
  double best_penalised_rss = std::numeric_limits<double>::infinity();  ///< min RSS · exp(penalty[k] / n), form's scale
  /// ln Σ (RSS · exp(penalty[k] / n))^(−n/2): the logarithm of the summed Akaike weights of the set, up to what all
  /// candidates of the response share. The sum leaves out candidates whose weights together are below
  /// Summary::kNegligibleWeight of the whole.
  double log_weight = -std::numeric_limits<double>::infinity();
};

/// By-products of the walk over every candidate of one response form that was scored, in plan order.
struct ResponseSummary {
  Standing all;
  std::vector<std::vector<Standing>> of_choice;  ///< [predictor][0 absent, 1 + form index]
  std::vector<Standing> by_terms;                ///< [number of predictors present, 0 … n_predictors]
  std::vector<std::uint64_t> histogram;          ///< [Summary::kBins] candidates by cv_sse
};

/// The whole space in figures. Empty `responses` when it was not asked for.
struct Summary {
  static constexpr double kNegligibleWeight = 1e-6;
  /// Bins of the histogram: four to an octave, the first holding everything below edge(1), the last everything from
  /// edge(kBins − 1).
  static constexpr std::size_t kBins = 64;

  std::vector<ResponseSummary> responses;
  /// [response] the unit of edge(): the empty candidate's held-out SSE, rounded up to a power of two times
  /// response_scale².
  std::vector<double> unit_sse;
  /// Lower edge of bin i in units of unit_sse: 2^(i div 4 − 14) · (1 + (i mod 4)/4).
  static double edge(std::size_t i);
};

struct WalkOptions {
  std::vector<PoolRule> rules;
  /// Also makes Summary, with this penalty by number of design columns k (empty: no summary).
  std::vector<double> summary_penalty;
  unsigned threads = 0;  ///< 0: all that the process may use
  std::stop_token stop;
  std::function<void(std::uint64_t scored)> progress;  ///< called from worker threads with increments; may be empty
  double smallest_pivot_rel = kSmallestPivot_rel;      ///< a child below it in any fold (or in all rows) is not entered
};

struct Scored {
  Choice choice;
  BigCount number;
  double cv_sse = 0.0;        ///< response_scale applied: form's scale
  double rss = 0.0;           ///< all rows, form's scale
  std::size_t n_columns = 0;  ///< design columns without intercept
};

struct WalkResult {
  /// [rule][response] best first, ties by candidate number; the same for any number of threads when complete.
  std::vector<std::vector<std::vector<Scored>>> lists;
  Summary summary;
  std::uint64_t n_scored = 0;
  BigCount n_inseparable = 0;  ///< candidates below a child that was not entered
  bool complete = true;        ///< false when stopped
};

/// Scores every candidate. Cost: O(folds) for the last predictor of each candidate, O(folds · open columns²) per
/// interior node; nothing depends on the number of rows.
WalkResult walk(const Space& space, const base::GramSet& grams, const WalkOptions& options);

/// Candidates done with per second on a thread, those found inseparable included, from a walk over subtrees spread
/// evenly over the space for about `seconds` (at least one subtree). Any space, however large.
double calibrate(const Space& space, const base::GramSet& grams, const WalkOptions& options, double seconds);

}  // namespace formsieve::search

// Room judge, result types: two to five candidates side by side, and how far their differences go beyond noise. Of a
// pair, differences are always second less first. May call: base and the result types of fit, checks, backtransform,
// forms.
#pragma once

#include <formsieve/judge.hpp>

#include <cstddef>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::judge {

/// Held-out errors of two candidates on the same folds.
struct FoldDifference {
  std::size_t n_folds = 0;         ///< folds × repeats in which both errors exist
  std::size_t n_first_lower = 0;   ///< folds in which the first has the lower mean squared error
  std::size_t n_second_lower = 0;  ///< … the second
  std::optional<double> mse;       ///< mean over folds of the difference of mean squared errors, own units squared
  std::optional<double> mse_se;    ///< √((1/J + n_test/n_train)·variance), Nadeau & Bengio 2003
  std::optional<double> rmse;      ///< difference of the CV RMSEs, own units
  std::optional<double> rmse_se;   ///< mse_se carried to the root
  std::optional<double> t, df, p;  ///< corrected resampled t, two-sided; unset where the folds do not differ at all
  bool beyond_noise = false;       ///< |t| lies beyond the central 95 % of its distribution
  std::string words;
};

enum class Nesting { none, first_in_second, second_in_first, same };

/// Own-scale likelihoods of two candidates. Nested ones by the F test of what the larger adds; others by Vuong 1989.
struct LikelihoodDifference {
  Nesting nesting = Nesting::none;
  double log_likelihood = 0.0;            ///< difference
  std::optional<double> z, z_aic, z_bic;  ///< Vuong: plain, less the AIC or BIC penalty; positive favours the second
  std::optional<double> p, p_aic, p_bic;  ///< two-sided
  std::optional<double> f, df, df2, p_f;  ///< nested
  bool beyond_noise = false;              ///< by z and z_bic alike, or by p_f
  std::string words;
};

/// The PE test of MacKinnon, White & Davidson 1983: each of a linear and a log-linear candidate as null hypothesis.
struct LinearLogTest {
  bool first_is_linear = true;
  std::optional<double> t_linear, df_linear, p_linear;  ///< against the linear candidate
  std::optional<double> t_log, df_log, p_log;           ///< against the log-linear one
  std::string words;
};

/// Where the smeared own-units predictions on the rows in use part most.
struct Disagreement {
  double root_mean_square_own = 0.0;
  std::optional<double> root_mean_square_rel;  ///< over the lower of the two CV RMSEs
  std::size_t row = 0;                         ///< index among the rows in use
  std::size_t line = 0;                        ///< line of the table; its row, from 1, where it has no lines
  double measured_own = 0.0, first_own = 0.0, second_own = 0.0;
  std::optional<double> difference_rel;                     ///< on that row, over the lower CV RMSE
  std::vector<std::pair<std::string, std::string>> values;  ///< raw values of the columns whose terms differ
  std::string words;
};

/// Parts that need the table are unset where it has changed or cannot be read.
struct PairComparison {
  std::size_t first = 0, second = 0;  ///< indices into Comparison::candidates
  FoldDifference folds;
  std::optional<LikelihoodDifference> likelihood;
  std::optional<LinearLogTest> linear_log;  ///< only where one is linear in the response and the other in its ln
  std::optional<Disagreement> disagreement;
};

/// What the correction in use leaves on held-out rows.
struct RemainingBias {
  std::string correction;
  std::optional<double> bias;      ///< mean of predicted less measured, own units
  std::optional<double> bias_rel;  ///< over the CV RMSE
  std::string words;
};

struct Comparison {
  std::string formsieve;
  DataSummary data;
  FoldSummary folds;
  std::vector<Candidate> candidates;  ///< in the order asked for
  std::vector<RemainingBias> bias;    ///< [candidates]
  std::vector<PairComparison> pairs;  ///< every pair, in the order of the candidates
  std::vector<std::string> missing;   ///< sentences: what cannot be shown, why, and what would mend it
  std::vector<std::string> cautions;
};

}  // namespace formsieve::judge

// The proof of a search: which candidates are the best by an information criterion, and what every form, every absence
// and every number of terms costs at least.
#pragma once

#include <formsieve/judge.hpp>

#include "base/gram.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"
#include "proof/prove.hpp"

#include <cstddef>
#include <functional>
#include <memory>
#include <optional>
#include <stop_token>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// The best of a set of candidates, and a bound for all of it.
struct Forced {
  std::optional<proof::Listed> best;  ///< response index of the search
  double lower_bound = 0.0;           ///< no candidate of the set scores less
  bool proved = false;                ///< `best` is the best, or the set is empty
};

/// Scores are the information criterion itself. Response indices are those of the search.
struct Proved {
  judge::Criterion criterion = judge::Criterion::aic;
  proof::Proof best;                           ///< the N best
  proof::Proof near;                           ///< all within the plan's distance, as many as are kept
  std::vector<std::vector<Forced>> of_choice;  ///< [predictor][0 absent, 1 + form]; empty when it was not made
  std::vector<Forced> by_terms;                ///< [number of terms]; as far as it was made
  std::vector<Forced> by_response;             ///< [response form]
  std::vector<std::size_t> without_density;    ///< response forms that have no likelihood on these rows
  std::uint64_t nodes = 0;
};

/// All callbacks must be set.
struct ProvingLimits {
  double seconds = 0.0;  ///< for all of it
  unsigned threads = 0;
  std::stop_token stop;
  /// A part of the work begins, of `total` units (0: nobody knows).
  std::function<void(const std::string& phase, double total, const std::string& unit)> begin;
  std::function<void(const std::string& phase)> rename;  ///< the part says how far it is
  std::function<void(std::uint64_t units)> progress;     ///< increments; may be called from several threads
};

/// Proves by the criterion that the plan ranks by, or AIC where that is none. Response forms without a likelihood (a
/// slope that is zero or infinite on some row) take no part. Only `all` of the Gram matrices is read. An answer at any
/// moment: what has not been reached when the time is up, or the stop comes, is open, with what is known of it.
/// `hints` as in proof::prove.
Proved prove_space(const Prepared& prepared, const run::Plan& plan, const base::GramSet& grams,
                   const LikelihoodConstants& constants, const ProvingLimits& limits,
                   std::vector<search::Choice> hints = {});

/// The candidates of lowest score by response form, best first, at most `most` each: what is known of each.
std::vector<std::vector<search::Choice>> lowest_by_response(const Proved& proved, std::size_t most);

}  // namespace formsieve::pipeline

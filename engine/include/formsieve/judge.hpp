// Room judge, result types: scores, the ranked shortlist and its named lines. May call: base and the result types of
// fit, checks, backtransform, forms.
#pragma once

#include <formsieve/backtransform.hpp>
#include <formsieve/checks.hpp>
#include <formsieve/fit.hpp>
#include <formsieve/forms.hpp>

#include <cstddef>
#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::judge {

/// Cross-validated error over all held-out rows and repeats, in own units unless named otherwise. Unset where a
/// held-out prediction is undefined.
struct CrossValidation {
  std::optional<double> rmse;        ///< with training-fold smearing
  std::optional<double> rmse_se;     ///< delta method from the fold-wise mean squared errors
  std::optional<double> bias;        ///< mean of predicted − measured
  std::optional<double> mae;         ///< mean absolute error
  std::optional<double> mae_median;  ///< median absolute error
  std::optional<double> rmse_naive;  ///< without bias correction
  double rmse_form_scale = 0.0;      ///< on the response form's scale
  double bias_form_scale = 0.0;
  std::vector<double> fold_mse;  ///< [folds × repeats] own-units mean squared error by fold; NaN where undefined
  std::size_t n_undefined = 0;   ///< held-out predictions that are undefined
};

/// Range of raw values seen by a term, and where its form is defined.
struct ValidRange {
  std::string column;
  double seen_min = 0.0, seen_max = 0.0;
  forms::Interval defined{};
  std::vector<std::string> levels;  ///< text columns: the levels known
};

struct Term {
  std::string column;
  forms::Form form;
};

/// One examined candidate in full.
struct Candidate {
  std::size_t rank = 0;            ///< 1 = best by the plan's criterion, among all examined
  std::string number;              ///< its number in the space, decimal
  std::vector<std::string> marks;  ///< of "best", "recommended", "simplest", "lowest AIC"
  std::string response_column;
  forms::Form response;
  std::vector<Term> terms;                     ///< in plan order
  std::string equation;                        ///< on the form's scale, rounded for reading
  std::vector<fit::Coefficient> coefficients;  ///< intercept first
  std::size_t n = 0;
  double rss = 0.0;    ///< weighted, form's scale
  double sigma = 0.0;  ///< √(rss/(n − coefficients)), form's scale
  fit::Likelihood likelihood;
  CrossValidation cv;
  double r2_form_scale = 0.0;
  std::optional<double> r2_own_units;  ///< 1 − SSE/TSS of the smeared predictions on the rows in use
  std::vector<checks::Check> checks;
  backtransform::Summary back;
  std::vector<ValidRange> ranges;
  checks::Influence influence;
  std::vector<backtransform::Effect> effects;  ///< in the order of the terms
  bool pareto = false;  ///< no other examined candidate is as good or better by CV error, number of terms and failed
                        ///< checks, and better by one of them
  std::vector<std::string> siblings;  ///< numbers of examined candidates with nearly the same predictions, by rank
  std::vector<std::string> cautions;
};

enum class Criterion { cv_rmse, aic, aicc, bic };

/// What was searched, and how far.
struct Coverage {
  std::string candidates;  ///< decimal, exact
  std::string scored;
  std::string inseparable = "0";   ///< not entered because a relative pivot fell below the guard in some fold
  std::string strategy = "every";  ///< every, proved, guided, or "proved and guided"
  std::string strategy_why;        ///< one sentence
  bool complete = true;            ///< false when stopped early
  bool proved = true;              ///< the listed pool is certainly the best by its screening scores
  double gap = 0.0;
  std::size_t pooled = 0, examined = 0;
  std::size_t set_aside_direction = 0;  ///< pooled candidates whose fitted effect contradicts a declared direction
  std::size_t set_aside_require = 0;    ///< pooled candidates that fail a required check
  std::string pool_formed;              ///< in words: which lists, how long
  std::string pool_margin;              ///< in words: how far the last pooled lie behind the shortlist
  double seconds = 0.0;                 ///< wall time of the search; not part of the byte-identical shortlist
  std::string family_rule;              ///< in words: when two candidates are shown as one line
};

struct DataSummary {
  std::string file, sha256, response, weight, group, order, fold;
  std::size_t rows_read = 0, rows_used = 0;
  std::vector<std::pair<std::string, std::size_t>>
      dropped;  ///< column, rows dropped because it was missing there (first such column in table order)
};

struct FoldSummary {
  std::size_t count = 0, repeats = 1;
  std::uint64_t seed = 0;
  std::string kind;  ///< "shuffled", "grouped", "ordered", "given"
};

/// Menus as searched.
struct PredictorMenu {
  std::string column;
  bool always = false;
  std::vector<forms::Form> forms;
  std::vector<std::string> labels;
  std::vector<std::string> notes;  ///< struck and merged forms with their reasons
};

/// How far the best of a set of candidates of one response form gets. Unset where none of the set was scored, or where
/// the score does not exist (an exact fit, a likelihood without a density).
struct Reach {
  std::optional<double> cv_rmse_form;    ///< lowest cross-validated RMSE, response form's scale
  std::optional<double> cv_loss_rel;     ///< that over the lowest of all candidates of the response form, less 1
  std::optional<double> criterion;       ///< lowest of the information criterion
  std::optional<double> criterion_loss;  ///< that less the lowest of all candidates under any response form
};

/// The same set under every response form, and over all of them.
struct Standing {
  std::vector<Reach> by_response;  ///< [response forms]
  std::optional<double> criterion, criterion_loss;
  /// 0 … 1, of the summed exp(−criterion/2) of all candidates (Akaike 1979); unset when the walk was stopped
  std::optional<double> weight_share;
};

/// One form of a predictor, or leaving it out.
struct FormStanding {
  std::optional<forms::Form> form;  ///< unset: left out
  Standing standing;
};

struct PredictorProfile {
  std::string column;
  bool always = false;                 ///< absence was not a choice
  std::vector<FormStanding> choices;   ///< in the order of the menu, left out last unless `always`
  std::optional<double> weight_share;  ///< of the candidates that have the predictor
};

struct TermsStanding {
  std::size_t n_terms = 0;  ///< predictors present
  Standing standing;
};

/// Candidates by cross-validated RMSE on the response form's scale.
struct ScoreDistribution {
  std::vector<double> edges;  ///< [counts + 1] rising; the first may be 0 and the last +infinity
  std::vector<std::uint64_t> counts;
};

struct ResponseProfile {
  Reach best;
  std::optional<double> weight_share;
  ScoreDistribution scores;
};

/// What the screen says of all the candidates that it scored, exact over them. Empty when it was not made. Figures are
/// rounded to nine digits, losses and shares to fewer, so that they are the same on every machine.
struct SpaceSummary {
  Criterion criterion = Criterion::aic;      ///< AICc or BIC where the plan ranks by it
  std::vector<ResponseProfile> responses;    ///< in the order of Shortlist::responses
  std::vector<PredictorProfile> predictors;  ///< in plan order
  std::vector<TermsStanding> by_terms;       ///< rising, numbers of terms that were scored

  bool empty() const noexcept { return responses.empty(); }
};

/// How far a set of candidates gets by an information criterion, as a proof says. Rounded like SpaceSummary.
struct ProvedReach {
  std::optional<double> criterion;      ///< lowest found; unset where none was
  std::optional<double> loss;           ///< that less the lowest found of all
  std::optional<double> loss_at_least;  ///< no candidate of the set loses less; unset where nothing is known
  bool proved = false;                  ///< the lowest found is the lowest there is
  std::optional<std::size_t> response;  ///< index into Shortlist::responses: where the lowest found stands
};

/// One form of a predictor, or leaving it out, forced.
struct ProvedChoice {
  std::optional<forms::Form> form;  ///< unset: left out
  ProvedReach reach;
  double near_share = 0.0;  ///< of the near-best set
};

struct ProvedPredictor {
  std::string column;
  bool always = false;
  std::vector<ProvedChoice> choices;  ///< in the order of the menu, left out last unless `always`
};

struct ProvedTerms {
  std::size_t n_terms = 0;
  ProvedReach reach;
};

/// What branch and bound says of candidates that were never visited. Empty when no proof was tried.
struct ProofReport {
  Criterion criterion = Criterion::aic;
  bool proved = false;     ///< nothing lies below the lowest found
  double gap = 0.0;        ///< what an unseen candidate may gain on the lowest found; 0 when proved
  double tolerance = 0.0;  ///< a candidate is ruled out only beyond this
  std::uint64_t nodes = 0;
  double within = 0.0;                      ///< the near-best set lies this close to the lowest found
  std::size_t n_near = 0;                   ///< candidates found in it
  bool near_complete = false;               ///< there are no others
  std::vector<ProvedReach> responses;       ///< in the order of Shortlist::responses
  std::vector<ProvedPredictor> predictors;  ///< in plan order
  std::vector<ProvedTerms> by_terms;        ///< rising
  std::vector<std::string> words;           ///< sentences for a reviewer: what all of the near-best set share, …

  bool empty() const noexcept { return responses.empty(); }
};

struct Shortlist {
  std::string formsieve;  ///< version that wrote it
  DataSummary data;
  Coverage space;
  FoldSummary folds;
  Criterion criterion = Criterion::cv_rmse;
  double near_tie = 0.02;
  std::vector<forms::Form> responses;
  std::vector<std::string> response_notes;
  std::vector<PredictorMenu> menus;
  SpaceSummary summary;
  ProofReport proof;
  std::vector<Candidate> candidates;  ///< the first `rank.shortlist` by rank, then named lines that lie further down
  std::vector<std::string> remarks;   ///< sentences about the whole result (picks that differ, folds reduced, …)
  std::vector<std::string> cautions;  ///< said once per result
};

}  // namespace formsieve::judge

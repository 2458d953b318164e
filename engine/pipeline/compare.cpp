// Candidates of a run folder side by side: the shortlist's records, and what refits on the run's own table add.
#include <formsieve/pipeline.hpp>

#include "fit/least_squares.hpp"
#include "judge/comparison.hpp"
#include "pipeline/guarded.hpp"
#include "pipeline/prepare.hpp"
#include "pipeline/refit.hpp"
#include "run/folder.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;

constexpr std::size_t kFewest = 2, kMost = 5;

std::string rank_words(const judge::Candidate& candidate) { return "rank " + std::to_string(candidate.rank); }

Result<std::vector<judge::Candidate>> candidates_of(const judge::Shortlist& shortlist,
                                                    const std::vector<std::size_t>& ranks) {
  if (ranks.size() < kFewest || ranks.size() > kMost)
    return Error{ErrorKind::usage, "two to five candidates can be compared, not " + std::to_string(ranks.size()), "",
                 "give two to five different ranks or named lines"};
  std::vector<judge::Candidate> candidates;
  for (const std::size_t rank : ranks) {
    const auto found = std::find_if(shortlist.candidates.begin(), shortlist.candidates.end(),
                                    [rank](const auto& candidate) { return candidate.rank == rank; });
    if (found == shortlist.candidates.end())
      return Error{ErrorKind::usage, "the shortlist has no rank " + std::to_string(rank), "",
                   "formsieve show lists the ranks"};
    if (std::any_of(candidates.begin(), candidates.end(), [rank](const auto& one) { return one.rank == rank; }))
      return Error{ErrorKind::usage, "rank " + std::to_string(rank) + " is named twice", "",
                   "name each candidate once; named lines may stand on the same rank"};
    candidates.push_back(*found);
  }
  return candidates;
}

/// True when every column of `small` lies in the span of `large`.
bool within_span(const Eigen::MatrixXd& small, const Eigen::MatrixXd& large) {
  // Design columns are told apart at correlations up to 0.9999; a residual this small is rounding.
  constexpr double kRounding = 1e-7;
  const Eigen::VectorXd none;
  for (Index k = 1; k < small.cols(); ++k) {
    const auto fit = fit::quick_fit(large, small.col(k), none);
    const double spread = (small.col(k).array() - small.col(k).mean()).matrix().norm();
    if (!fit || fit->residuals.norm() > kRounding * spread) return false;
  }
  return true;
}

/// t of a column added to a fit, and the degrees of freedom.
struct Added {
  std::optional<double> t, df, p;
};

Added added_column(const Refit& refit, const Eigen::VectorXd& column, const Eigen::VectorXd& weights) {
  Added added;
  if (!column.allFinite()) return added;
  Eigen::MatrixXd x(refit.x.rows(), refit.x.cols() + 1);
  x << refit.x, column;
  const auto fit = fit::least_squares(x, refit.response, weights);
  if (!fit || x.rows() <= x.cols() || !(fit->se[x.cols() - 1] > 0.0)) return added;
  added.t = fit->coefficients[x.cols() - 1] / fit->se[x.cols() - 1];
  added.df = static_cast<double>(x.rows() - x.cols());
  added.p = judge::p_of_t(*added.t, *added.df);
  return added;
}

bool is_identity(const forms::Form& form) { return form == forms::Form{}; }
bool is_plain_ln(const forms::Form& form) { return form.kind == forms::Kind::ln && !form.reflect && form.shift == 0.0; }

/// MacKinnon, White & Davidson 1983: into the linear fit goes ln ŷ − (ln y)^, into the log-linear one ŷ − exp (ln y)^.
std::optional<judge::LinearLogTest> linear_log_test(const judge::Candidate& first, const judge::Candidate& second,
                                                    const Refit& fit_first, const Refit& fit_second,
                                                    const Eigen::VectorXd& weights) {
  judge::LinearLogTest test;
  test.first_is_linear = is_identity(first.response);
  const auto& linear = test.first_is_linear ? first : second;
  const auto& logarithmic = test.first_is_linear ? second : first;
  if (!is_identity(linear.response) || !is_plain_ln(logarithmic.response)) return std::nullopt;
  const Refit& fit_linear = test.first_is_linear ? fit_first : fit_second;
  const Refit& fit_log = test.first_is_linear ? fit_second : fit_first;
  const Eigen::ArrayXd own = fit_linear.fit.fitted.array(), logs = fit_log.fit.fitted.array();
  const Added against_linear = added_column(fit_linear, own.log() - logs, weights);
  const Added against_log = added_column(fit_log, own - logs.exp(), weights);
  test.t_linear = against_linear.t;
  test.df_linear = against_linear.df;
  test.p_linear = against_linear.p;
  test.t_log = against_log.t;
  test.df_log = against_log.df;
  test.p_log = against_log.p;
  return test;
}

judge::LikelihoodDifference likelihood_difference(const judge::Candidate& first, const judge::Candidate& second,
                                                  const Refit& fit_first, const Refit& fit_second) {
  if (first.response == second.response) {
    const bool in_second = within_span(fit_first.x, fit_second.x), in_first = within_span(fit_second.x, fit_first.x);
    if (in_second || in_first)
      return judge::nested_f(fit_first.fit.rss, fit_second.fit.rss, static_cast<std::size_t>(fit_first.x.cols()),
                             static_cast<std::size_t>(fit_second.x.cols()), first.n);
  }
  return judge::vuong(fit_first.log_density, fit_second.log_density, first.likelihood.n_parameters,
                      second.likelihood.n_parameters);
}

/// Columns whose terms differ between the two, in the order of the first and then of the second.
std::vector<std::string> differing_columns(const judge::Candidate& first, const judge::Candidate& second) {
  const auto has = [](const judge::Candidate& candidate, const judge::Term& term) {
    return std::any_of(candidate.terms.begin(), candidate.terms.end(), [&](const judge::Term& other) {
      return other.column == term.column && other.form == term.form;
    });
  };
  std::vector<std::string> columns;
  const auto add = [&](const judge::Candidate& from, const judge::Candidate& other) {
    for (const judge::Term& term : from.terms)
      if (!has(other, term) && std::find(columns.begin(), columns.end(), term.column) == columns.end())
        columns.push_back(term.column);
  };
  add(first, second);
  add(second, first);
  return columns;
}

std::optional<judge::Disagreement> disagreement_of(const judge::Candidate& first, const judge::Candidate& second,
                                                   const Refit& fit_first, const Refit& fit_second,
                                                   const Prepared& prepared) {
  const std::optional<double>& a = first.cv.rmse;
  const std::optional<double>& b = second.cv.rmse;
  auto found = judge::disagreement(fit_first.mean_own, fit_second.mean_own, prepared.data.response,
                                   a && b ? std::min(*a, *b)
                                   : a    ? a
                                          : b);
  if (!found) return found;
  found->line = line_of(prepared.table, found->row);
  for (const std::string& column : differing_columns(first, second))
    found->values.emplace_back(column, cell_text(prepared.table, column, found->row));
  return found;
}

std::vector<judge::PairComparison> pairs_of(const std::vector<judge::Candidate>& candidates, std::size_t n_folds) {
  std::vector<judge::PairComparison> pairs;
  for (std::size_t i = 0; i < candidates.size(); ++i)
    for (std::size_t j = i + 1; j < candidates.size(); ++j) {
      judge::PairComparison pair;
      pair.first = i;
      pair.second = j;
      pair.folds = judge::fold_difference(candidates[i].cv, candidates[j].cv, n_folds);
      judge::put_in_words(pair.folds, rank_words(candidates[i]), rank_words(candidates[j]));
      pairs.push_back(std::move(pair));
    }
  return pairs;
}

/// What only the refits can say.
void add_refitted(judge::Comparison& comparison, const Prepared& prepared, const std::vector<Refit>& refits) {
  const Eigen::VectorXd weights =
      Eigen::Map<const Eigen::VectorXd>(prepared.data.weights.data(), static_cast<Index>(prepared.data.weights.size()));
  for (auto& pair : comparison.pairs) {
    const judge::Candidate& first = comparison.candidates[pair.first];
    const judge::Candidate& second = comparison.candidates[pair.second];
    const Refit& fit_first = refits[pair.first];
    const Refit& fit_second = refits[pair.second];
    const std::string name_first = rank_words(first), name_second = rank_words(second);
    pair.likelihood = likelihood_difference(first, second, fit_first, fit_second);
    judge::put_in_words(*pair.likelihood, name_first, name_second);
    pair.linear_log = linear_log_test(first, second, fit_first, fit_second, weights);
    if (pair.linear_log) judge::put_in_words(*pair.linear_log, name_first, name_second);
    pair.disagreement = disagreement_of(first, second, fit_first, fit_second, prepared);
    if (pair.disagreement) judge::put_in_words(*pair.disagreement, name_first, name_second);
  }
}

judge::Comparison from_records(const judge::Shortlist& shortlist, std::vector<judge::Candidate> candidates) {
  judge::Comparison comparison;
  comparison.formsieve = version();
  comparison.data = shortlist.data;
  comparison.folds = shortlist.folds;
  comparison.candidates = std::move(candidates);
  for (const auto& candidate : comparison.candidates) comparison.bias.push_back(judge::remaining_bias(candidate));
  comparison.pairs = pairs_of(comparison.candidates, shortlist.folds.count);
  comparison.cautions = {
      "The search chose these candidates by the errors that are compared here: the leader's lead is flattered, and a "
      "difference that is no more than noise before that is none after it.",
      "Every test is of one pair by itself; with several pairs one of them exceeds noise by chance more often than one "
      "time in twenty."};
  return comparison;
}

std::string missing_words(const Error& error) {
  std::string words =
      "Shown is what the run folder holds. Missing are the comparison of likelihoods row by row, the "
      "test of linear against log-linear and the rows on which predictions part: " +
      error.message;
  if (!error.where.empty()) words += " (" + error.where + ")";
  return error.hint.empty() ? words : words + "; " + error.hint;
}

Result<judge::Comparison> compare_in(const std::string& run_folder, const std::vector<std::size_t>& ranks,
                                     unsigned threads) {
  const auto shortlist = open_run(run_folder);
  if (!shortlist) return shortlist.error();
  auto candidates = candidates_of(*shortlist, ranks);
  if (!candidates) return candidates.error();
  judge::Comparison comparison = from_records(*shortlist, std::move(*candidates));
  const auto prepared = prepare_again(run_folder, shortlist->data, threads);
  if (!prepared) {
    comparison.missing.push_back(missing_words(prepared.error()));
    return comparison;
  }
  const auto refits = refit(*prepared, comparison.candidates, threads);
  if (refits)
    add_refitted(comparison, *prepared, *refits);
  else
    comparison.missing.push_back(missing_words(refits.error()));
  return comparison;
}

}  // namespace

Result<judge::Comparison> compare(const std::string& run_folder, const std::vector<std::size_t>& ranks,
                                  unsigned threads) {
  return guarded(run_folder, [&] { return compare_in(run_folder, ranks, threads); });
}

}  // namespace formsieve::pipeline

#include "pipeline/examine.hpp"

#include "backtransform/backtransform.hpp"
#include "backtransform/effects.hpp"
#include "checks/influence.hpp"
#include "fit/least_squares.hpp"
#include "fit/robust.hpp"
#include "judge/judge.hpp"
#include "pipeline/held_out_intervals.hpp"
#include "pipeline/own_units.hpp"
#include "report/equation.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;

std::vector<fit::Coefficient> coefficients_of(const judge::Candidate& candidate, const fit::Fit& fit) {
  std::vector<fit::Coefficient> coefficients = {{"intercept", fit.coefficients[0], fit.se[0], fit.se_robust[0]}};
  Index at = 1;
  for (const auto& term : candidate.terms)
    for (std::size_t k = 0; k < forms::n_columns(term.form); ++k, ++at)
      coefficients.push_back(
          {forms::label(term.form, term.column, k), fit.coefficients[at], fit.se[at], fit.se_robust[at]});
  return coefficients;
}

checks::Subject subject_of(const judge::Candidate& candidate, const Eigen::MatrixXd& x, const fit::Fit& fit,
                           const Eigen::VectorXd& weights, const Prepared& prepared) {
  checks::Subject subject{x,  fit.fitted, fit.residuals,           fit.leverage,  weights, fit.sigma,
                          {}, {},         !prepared.order.empty(), prepared.order};
  subject.lines = lines_of(prepared.table);
  std::size_t at = 1;
  for (const auto& term : candidate.terms) {
    subject.term_first.push_back(at);
    subject.term_names.push_back(forms::term_name(term.form, term.column));
    at += forms::n_columns(term.form);
  }
  return subject;
}

/// The fit that a few rows cannot move; unset where there is none to compare with.
std::optional<checks::Insensitive> insensitive(const Eigen::MatrixXd& x, const Eigen::VectorXd& weights,
                                               const fit::Fit& plain) {
  auto robust = fit::robust_fit(x, weights, plain);
  if (!robust) return std::nullopt;
  return checks::Insensitive{std::move(robust->coefficients), robust->n_downweighted, std::move(robust->method)};
}

/// Whether a check that looks at spread against the fitted value is broken.
bool is_spread_broken(const std::vector<checks::Check>& checks) {
  return std::any_of(checks.begin(), checks.end(), [](const checks::Check& check) {
    if (check.name != "equal-spread" && check.name != "equal-spread-by-thirds") return false;
    return check.verdict ? *check.verdict == checks::Verdict::broken : !check.passes;
  });
}

}  // namespace

std::vector<judge::ValidRange> Examiner::ranges(const search::Choice& choice) const {
  std::vector<judge::ValidRange> ranges;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const design::Predictor& predictor = prepared_.data.predictors[j];
    const forms::Form& form = predictor.menu[choice.choice[j] - 1];
    const forms::ColumnFacts& facts = profile_of(prepared_.survey, predictor.column).facts;
    judge::ValidRange range{predictor.column, facts.min, facts.max, {}, {}};
    if (predictor.text)
      range.levels = facts.levels;
    else
      range.defined = forms::domain(form);
    ranges.push_back(std::move(range));
  }
  return ranges;
}

Status Examiner::check(const search::Choice& choice, judge::Candidate& candidate) const {
  const Eigen::MatrixXd x = design_of(choice);
  const auto fit = fit::least_squares(x, response_[choice.response], weights_);
  if (!fit) return fit.error();
  candidate.checks = checks::run_all(subject_of(candidate, x, *fit, weights_, prepared_));
  return {};
}

std::vector<double> Examiner::predictions(const search::Choice& choice, std::size_t step) const {
  const std::size_t n = prepared_.data.n_rows;
  std::vector<double> means((n + step - 1) / step, std::numeric_limits<double>::quiet_NaN());
  const auto fit = fit::quick_fit(design_of(choice), response_[choice.response], weights_);
  if (!fit) return means;
  const backtransform::Smearing smearing(prepared_.data.response_forms[choice.response], fit->residuals, weights_);
  for (std::size_t k = 0; k < means.size(); ++k) {
    const auto row = static_cast<Index>(k * step);
    const double fitted = response_[choice.response][row] - fit->residuals[row];
    means[k] = smearing.mean(fitted, weights_.size() > 0 ? weights_[row] : 1.0);
  }
  return means;
}

Status Examiner::complete(const search::Choice& choice, judge::Candidate& candidate) const {
  const Eigen::MatrixXd x = design_of(choice);
  const auto fit = fit::least_squares(x, response_[choice.response], weights_);
  if (!fit) return fit.error();
  candidate.coefficients = coefficients_of(candidate, *fit);
  candidate.rss = fit->rss;
  candidate.sigma = fit->sigma;
  candidate.likelihood = fit::own_scale_likelihood(fit->rss, candidate.n, static_cast<std::size_t>(x.cols()),
                                                   log_jacobian_[choice.response], half_log_weights_);
  candidate.r2_form_scale = 1.0 - fit->rss / fit->tss;

  auto found = checks::examine(subject_of(candidate, x, *fit, weights_, prepared_), candidate.coefficients,
                               insensitive(x, weights_, *fit));
  candidate.checks = std::move(found.checks);
  candidate.influence = std::move(found.influence);
  candidate.ranges = ranges(choice);
  candidate.equation = report::equation(candidate);
  if (auto status = back_to_own_units(choice, x, *fit, candidate); !status) return status;
  candidate.cautions = judge::candidate_cautions(candidate);
  return {};
}

Status Examiner::back_to_own_units(const search::Choice& choice, const Eigen::MatrixXd& x, const fit::Fit& fit,
                                   judge::Candidate& candidate) const {
  const Eigen::VectorXd& z = response_[choice.response];
  const FittedRows rows{candidate.response, x, z, weights_, prepared_.data.response, prepared_.folds};
  const fit::FoldedFit folded(x, z, weights_, prepared_.folds.fold_of.front(), prepared_.folds.count);
  auto own = own_units(rows, fit, folded, is_spread_broken(candidate.checks), candidate.response_column,
                       report::linear_predictor(candidate));
  if (!own) return own.error();
  candidate.r2_own_units = own->r2_own_units;
  auto& back = candidate.back;
  back.smearing_factor = own->smearing_factor;
  back.corrections = std::move(own->corrections);
  back.used = own->used_name;
  back.why_used = own->why_used;
  back.mean_median_words = own->mean_median_words;
  back.formula = own->formula;
  back.intervals = {own->normal, judged_cross_interval(rows, folded)};

  const std::vector<backtransform::EffectTerm> terms = effect_terms(choice);
  candidate.effects = backtransform::effects({candidate.response, candidate.response_column, terms, fit.coefficients,
                                              fit.covariance, static_cast<double>(x.rows() - x.cols()), *own->used});
  return {};
}

std::vector<backtransform::EffectTerm> Examiner::effect_terms(const search::Choice& choice) const {
  std::vector<backtransform::EffectTerm> terms;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const design::Predictor& predictor = prepared_.data.predictors[j];
    const survey::ColumnProfile& profile = profile_of(prepared_.survey, predictor.column);
    backtransform::EffectTerm term{predictor.column, predictor.menu[choice.choice[j] - 1], prepared_.direction[j]};
    term.min = profile.facts.min;
    term.q1 = profile.q1;
    term.median = profile.median;
    term.q3 = profile.q3;
    term.max = profile.facts.max;
    if (predictor.text) term.most_frequent = profile.facts.levels.front();
    terms.push_back(std::move(term));
  }
  return terms;
}

}  // namespace formsieve::pipeline

#include "pipeline/examine.hpp"

#include "base/sums.hpp"
#include "backtransform/backtransform.hpp"
#include "checks/checks.hpp"
#include "fit/least_squares.hpp"
#include "judge/judge.hpp"
#include "report/equation.hpp"

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
                           const Eigen::VectorXd& weights, const std::vector<std::size_t>& order) {
  checks::Subject subject{x,  fit.fitted, fit.residuals,  fit.leverage, weights, fit.sigma,
                          {}, {},         !order.empty(), order};
  std::size_t at = 1;
  for (const auto& term : candidate.terms) {
    subject.term_first.push_back(at);
    subject.term_names.push_back(forms::term_name(term.form, term.column));
    at += forms::n_columns(term.form);
  }
  return subject;
}

/// R² in own units of the smeared predictions, and the mean smeared over the mean uncorrected prediction, on the rows
/// in use.
struct OwnUnits {
  std::optional<double> r2;
  double factor = 1.0;
};

OwnUnits own_units(const backtransform::Smearing& smearing, const fit::Fit& fit, const std::vector<double>& measured,
                   const Eigen::VectorXd& weights) {
  const std::size_t n = measured.size();
  std::vector<double> error(n);
  std::vector<double> mean(n);
  std::vector<double> naive(n);
  for (std::size_t i = 0; i < n; ++i) {
    const auto row = static_cast<Index>(i);
    mean[i] = smearing.mean(fit.fitted[row], weights.size() > 0 ? weights[row] : 1.0);
    naive[i] = smearing.naive(fit.fitted[row]);
    error[i] = measured[i] - mean[i];
  }
  OwnUnits result;
  const double sse = base::sum_of_squares(error, 0.0);
  const double tss = base::sum_of_squares(measured, base::mean(measured));
  if (std::isfinite(sse)) result.r2 = 1.0 - sse / tss;
  const double ratio = base::sum(mean) / base::sum(naive);
  if (const auto constant = smearing.constant_factor())
    result.factor = *constant;
  else if (std::isfinite(ratio))
    result.factor = ratio;
  return result;
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
  candidate.checks = checks::run_all(subject_of(candidate, x, *fit, weights_, prepared_.order));
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

  const backtransform::Smearing smearing(candidate.response, fit->residuals, weights_);
  const OwnUnits own = own_units(smearing, *fit, prepared_.data.response, weights_);
  candidate.r2_own_units = own.r2;
  candidate.back.smearing_factor = own.factor;
  for (auto& correction : candidate.back.corrections)
    if (correction.method == "smearing") correction.factor = own.factor;

  candidate.checks = checks::run_all(subject_of(candidate, x, *fit, weights_, prepared_.order));
  candidate.ranges = ranges(choice);
  candidate.equation = report::equation(candidate);
  candidate.back.formula =
      backtransform::formula(smearing, candidate.response_column, report::linear_predictor(candidate));
  candidate.cautions = judge::candidate_cautions(candidate);
  return {};
}

}  // namespace formsieve::pipeline

#include "pipeline/examine.hpp"

#include "base/sums.hpp"
#include "fit/folded_fit.hpp"
#include "fit/least_squares.hpp"
#include "backtransform/backtransform.hpp"
#include "judge/judge.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;

/// Quartiles between which a fitted effect is compared with a declared direction; the extremes where the quartiles are
/// equal.
std::pair<double, double> ends_of(const survey::ColumnProfile& profile) {
  if (profile.q1 < profile.q3) return {profile.q1, profile.q3};
  return {profile.facts.min, profile.facts.max};
}

double half_log_sum(const std::vector<double>& weights) {
  std::vector<double> logs(weights.size());
  std::transform(weights.begin(), weights.end(), logs.begin(), [](double w) { return std::log(w); });
  return 0.5 * base::sum(logs);
}

}  // namespace

/// Held-out predictions by repeat and row, flattened.
struct Examiner::Prediction {
  std::vector<double> mean_own, naive_own, form;
};

Examiner::Examiner(const Prepared& prepared) : prepared_(prepared), all_rows_(prepared.data.n_rows) {
  std::iota(all_rows_.begin(), all_rows_.end(), std::size_t{0});
  const auto& data = prepared.data;
  weights_ = Eigen::Map<const Eigen::VectorXd>(data.weights.data(), static_cast<Index>(data.weights.size()));
  half_log_weights_ = half_log_sum(data.weights);
  std::vector<double> logs(data.n_rows);
  for (std::size_t r = 0; r < data.response_forms.size(); ++r) {
    response_.push_back(design::response_vector(data, r, all_rows_));
    for (std::size_t i = 0; i < data.n_rows; ++i)
      logs[i] = forms::log_abs_derivative(data.response_forms[r], data.response[i]);
    log_jacobian_.push_back(base::sum(logs));
  }
}

Eigen::MatrixXd Examiner::design_of(const search::Choice& choice) const {
  return design::design_matrix(prepared_.data, choice.choice, all_rows_);
}

Result<Examiner::Prediction> Examiner::held_out(const search::Choice& choice, const Eigen::MatrixXd& x,
                                                const Eigen::VectorXd& z) const {
  const auto& folds = prepared_.folds;
  const std::size_t n = prepared_.data.n_rows;
  const bool weighted = weights_.size() > 0;
  Prediction prediction;
  prediction.mean_own.resize(folds.repeats * n);
  prediction.naive_own.resize(folds.repeats * n);
  prediction.form.resize(folds.repeats * n);
  Eigen::VectorXd residuals(static_cast<Index>(n));
  Eigen::VectorXd training_weights(weighted ? static_cast<Index>(n) : 0);
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    const auto& fold_of = folds.fold_of[repeat];
    const fit::FoldedFit folded(x, z, weights_, fold_of, folds.count);
    for (std::size_t fold = 0; fold < folds.count; ++fold) {
      const auto solution = folded.without(fold);
      if (!solution) return solution.error();
      const Eigen::VectorXd fitted = x * solution->coefficients;
      Index n_training = 0;
      for (std::size_t i = 0; i < n; ++i) {
        if (fold_of[i] == fold) continue;
        residuals[n_training] = z[static_cast<Index>(i)] - fitted[static_cast<Index>(i)];
        if (weighted) training_weights[n_training] = weights_[static_cast<Index>(i)];
        ++n_training;
      }
      const backtransform::Smearing smearing(prepared_.data.response_forms[choice.response], residuals.head(n_training),
                                             training_weights.head(weighted ? n_training : 0));
      for (std::size_t i = 0; i < n; ++i) {
        if (fold_of[i] != fold) continue;
        const double eta = fitted[static_cast<Index>(i)];
        prediction.form[repeat * n + i] = eta;
        prediction.mean_own[repeat * n + i] = smearing.mean(eta, weighted ? weights_[static_cast<Index>(i)] : 1.0);
        prediction.naive_own[repeat * n + i] = smearing.naive(eta);
      }
    }
  }
  return prediction;
}

bool Examiner::contradicts(const search::Choice& choice, const Eigen::VectorXd& coefficients) const {
  const int response_sign = forms::monotone_sign(prepared_.data.response_forms[choice.response]);
  Index column = 1;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const design::Predictor& predictor = prepared_.data.predictors[j];
    const forms::Form& form = predictor.menu[choice.choice[j] - 1];
    const auto width = static_cast<Index>(forms::n_columns(form));
    if (prepared_.direction[j] != 0) {
      const auto [low, high] = ends_of(profile_of(prepared_.survey, predictor.column));
      std::vector<double> at_low(static_cast<std::size_t>(width));
      std::vector<double> at_high(static_cast<std::size_t>(width));
      forms::evaluate(form, low, at_low);
      forms::evaluate(form, high, at_high);
      double effect = 0.0;
      for (Index k = 0; k < width; ++k)
        effect +=
            coefficients[column + k] * (at_high[static_cast<std::size_t>(k)] - at_low[static_cast<std::size_t>(k)]);
      if (effect * response_sign * prepared_.direction[j] < 0.0) return true;
    }
    column += width;
  }
  return false;
}

judge::Candidate Examiner::named(const search::Choice& choice, const search::BigCount& number) const {
  judge::Candidate candidate;
  candidate.number = number.str();
  candidate.response_column = prepared_.summary.response;
  candidate.response = prepared_.data.response_forms[choice.response];
  candidate.n = prepared_.data.n_rows;
  for (std::size_t j = 0; j < choice.choice.size(); ++j)
    if (choice.choice[j] != 0)
      candidate.terms.push_back(
          {prepared_.data.predictors[j].column, prepared_.data.predictors[j].menu[choice.choice[j] - 1]});
  return candidate;
}

Examined Examiner::score(const search::Choice& choice, const search::BigCount& number) const {
  Examined examined;
  examined.choice = choice;
  const Eigen::MatrixXd x = design_of(choice);
  const Eigen::VectorXd& z = response_[choice.response];
  const std::size_t n = prepared_.data.n_rows;

  const fit::FoldedFit folded(x, z, weights_, prepared_.folds.fold_of.front(), prepared_.folds.count);
  const auto solution = folded.all();
  if (!solution) {
    examined.failure = solution.error().message;
    return examined;
  }
  examined.contradicts_direction = contradicts(choice, solution->coefficients);
  const auto prediction = held_out(choice, x, z);
  if (!prediction) {
    examined.failure = prediction.error().message;
    return examined;
  }
  judge::Candidate candidate = named(choice, number);
  candidate.rss = solution->rss;
  candidate.likelihood = fit::own_scale_likelihood(solution->rss, n, static_cast<std::size_t>(x.cols()),
                                                   log_jacobian_[choice.response], half_log_weights_);
  judge::HeldOut held;
  held.measured_own = prepared_.data.response;
  held.measured_form = std::span<const double>(z.data(), n);
  held.mean_own = prediction->mean_own;
  held.naive_own = prediction->naive_own;
  held.predicted_form = prediction->form;
  held.n_folds = prepared_.folds.count;
  for (const auto& fold_of : prepared_.folds.fold_of) held.fold_of.emplace_back(fold_of);
  candidate.cv = judge::cross_validation(held);
  const double naive_bias = [&] {
    std::vector<double> errors(prediction->naive_own.size());
    for (std::size_t i = 0; i < errors.size(); ++i)
      errors[i] = prediction->naive_own[i] - prepared_.data.response[i % n];
    return base::mean(errors);
  }();
  backtransform::Correction none{"none", 1.0, std::nullopt, candidate.cv.rmse_naive};
  if (std::isfinite(naive_bias)) none.cv_bias = naive_bias;
  candidate.back.corrections = {none, {"smearing", 1.0, candidate.cv.bias, candidate.cv.rmse}};
  examined.candidate = std::move(candidate);
  return examined;
}

}  // namespace formsieve::pipeline

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

Status Examiner::predict_repeat(const search::Choice& choice, const Eigen::MatrixXd& x, const Eigen::VectorXd& z,
                                std::size_t repeat, const fit::FoldedFit& folded, Prediction& prediction) const {
  const auto& fold_of = prepared_.folds.fold_of[repeat];
  const std::size_t n = prepared_.data.n_rows;
  const bool weighted = weights_.size() > 0;
  Eigen::VectorXd residuals(z.size());
  Eigen::VectorXd training_weights(weights_.size());
  for (std::size_t fold = 0; fold < prepared_.folds.count; ++fold) {
    const auto solution = folded.without(fold);
    if (!solution) return solution.error();
    const Eigen::VectorXd fitted = x * solution->coefficients;
    Index n_training = 0;
    for (std::size_t i = 0; i < n; ++i) {
      if (fold_of[i] == fold) continue;
      const auto row = static_cast<Index>(i);
      residuals[n_training] = z[row] - fitted[row];
      if (weighted) training_weights[n_training] = weights_[row];
      ++n_training;
    }
    const backtransform::Smearing smearing(prepared_.data.response_forms[choice.response], residuals.head(n_training),
                                           training_weights.head(weighted ? n_training : 0));
    for (std::size_t i = 0; i < n; ++i) {
      if (fold_of[i] != fold) continue;
      const auto row = static_cast<Index>(i);
      const double eta = fitted[row];
      prediction.form[repeat * n + i] = eta;
      prediction.mean_own[repeat * n + i] = smearing.mean(eta, weighted ? weights_[row] : 1.0);
      prediction.naive_own[repeat * n + i] = smearing.naive(eta);
    }
  }
  return {};
}

Result<Examiner::Prediction> Examiner::held_out(const search::Choice& choice, const Eigen::MatrixXd& x,
                                                const Eigen::VectorXd& z, const fit::FoldedFit& first_repeat) const {
  const auto& folds = prepared_.folds;
  Prediction prediction;
  for (auto* values : {&prediction.mean_own, &prediction.naive_own, &prediction.form})
    values->resize(folds.repeats * prepared_.data.n_rows);
  if (auto status = predict_repeat(choice, x, z, 0, first_repeat, prediction); !status) return status.error();
  for (std::size_t repeat = 1; repeat < folds.repeats; ++repeat) {
    const fit::FoldedFit folded(x, z, weights_, folds.fold_of[repeat], folds.count);
    if (auto status = predict_repeat(choice, x, z, repeat, folded, prediction); !status) return status.error();
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
  const auto prediction = held_out(choice, x, z, folded);
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
  candidate.back.corrections = {backtransform::judged("none", 1.0, prediction->naive_own, prepared_.data.response),
                                backtransform::judged("smearing", 1.0, prediction->mean_own, prepared_.data.response)};
  examined.candidate = std::move(candidate);
  return examined;
}

}  // namespace formsieve::pipeline

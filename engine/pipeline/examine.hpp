// The examination of pooled candidates: refit, own-units cross-validation, likelihood; checks and the full record for
// those that are listed.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/model.hpp>

#include "backtransform/effects.hpp"
#include "fit/folded_fit.hpp"
#include "fit/least_squares.hpp"
#include "pipeline/prepare.hpp"
#include "search/space.hpp"

#include <optional>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// What the own-scale likelihood has beside the residual sum of squares (design.md, "Own-scale likelihood").
struct LikelihoodConstants {
  std::vector<double> log_jacobian;  ///< [response forms] Σ ln|g′(y_i)|
  double half_log_weights = 0.0;     ///< ½ Σ ln w_i
};

/// What ranking needs to know of one pooled candidate.
struct Examined {
  search::Choice choice;
  std::optional<judge::Candidate>
      candidate;  ///< unset when it could not be fitted on all rows or in every training part
  bool contradicts_direction = false;
  std::string failure;  ///< why candidate is unset
};

/// Scores and completes candidates of one prepared search. Immutable, shared by all workers.
class Examiner {
 public:
  explicit Examiner(const Prepared& prepared);

  /// Likelihood, criteria and cross-validated error of one candidate. Cost O(n k (k + folds)); exact refits by
  /// orthogonal transformations (fit::FoldedFit).
  Examined score(const search::Choice& choice, const search::BigCount& number) const;

  /// Fills in the rest of a scored candidate: coefficients with standard errors, R², checks, back-transformation,
  /// ranges, equation, cautions.
  Status complete(const search::Choice& choice, judge::Candidate& candidate) const;

  /// Fills in the checks alone: what a gate needs to know. Cost of one full fit and its checks.
  Status check(const search::Choice& choice, judge::Candidate& candidate) const;

  /// Smeared own-units predictions of the fit on all rows, at the rows in use number 0, step, 2·step, …; NaN where
  /// undefined, all NaN where it cannot be fitted. Cost O(n k²).
  std::vector<double> predictions(const search::Choice& choice, std::size_t step) const;

  /// What scores new rows by a completed candidate. Cost that of a FoldedFit, O(n k (k + folds)).
  Result<model::Model> model(const search::Choice& choice, const judge::Candidate& candidate) const;

  /// What turns residual sums of squares into own-scale likelihoods.
  LikelihoodConstants likelihood_constants() const { return {log_jacobian_, half_log_weights_}; }

 private:
  struct Prediction;
  Eigen::MatrixXd design_of(const search::Choice& choice) const;
  Result<Prediction> held_out(const search::Choice& choice, const Eigen::MatrixXd& x, const Eigen::VectorXd& z,
                              const fit::FoldedFit& first_repeat) const;
  Status predict_repeat(const search::Choice& choice, const Eigen::MatrixXd& x, const Eigen::VectorXd& z,
                        std::size_t repeat, const fit::FoldedFit& folded, Prediction& prediction) const;
  Status keep_folds(const Eigen::MatrixXd& x, const Eigen::VectorXd& z, const fit::FoldedFit& folded,
                    model::Model& model) const;
  bool contradicts(const search::Choice& choice, const Eigen::VectorXd& coefficients) const;
  judge::Candidate named(const search::Choice& choice, const search::BigCount& number) const;
  std::vector<judge::ValidRange> ranges(const search::Choice& choice) const;
  Status back_to_own_units(const search::Choice& choice, const Eigen::MatrixXd& x, const fit::Fit& fit,
                           judge::Candidate& candidate) const;
  std::vector<backtransform::EffectTerm> effect_terms(const search::Choice& choice) const;

  const Prepared& prepared_;
  std::vector<std::size_t> all_rows_;
  Eigen::VectorXd weights_;  // size 0 for none
  double half_log_weights_ = 0.0;
  std::vector<Eigen::VectorXd> response_;  // [response forms] values on the form's scale
  std::vector<double> log_jacobian_;       // [response forms]
};

}  // namespace formsieve::pipeline

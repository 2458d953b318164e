#include "pipeline/profile.hpp"

#include "pipeline/rounding.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace formsieve::pipeline {

namespace {

using judge::Criterion;

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// As fine as the walk's sums of weights are (search::Summary::kNegligibleWeight).
constexpr double kShareStep = 1e-6;

/// ln Σ exp(logs).
double log_of_sum(const std::vector<double>& logs) {
  const double largest = logs.empty() ? -kInfinity : *std::max_element(logs.begin(), logs.end());
  if (!std::isfinite(largest)) return largest;
  double sum = 0.0;
  for (const double log : logs) sum += std::exp(log - largest);
  return largest + std::log(sum);
}

/// Turns what the walk says of sets of candidates into figures a person can compare.
class Translator {
 public:
  Translator(const search::WalkResult& walked, const Prepared& prepared, const LikelihoodConstants& constants)
      : summary_(walked.summary),
        complete_(walked.complete),
        n_rows_(static_cast<double>(prepared.data.n_rows)),
        n_held_out_(n_rows_ * static_cast<double>(prepared.folds.repeats)),
        constants_(constants) {
    std::vector<double> log_weights;
    for (std::size_t r = 0; r < summary_.responses.size(); ++r) {
      lowest_ = std::min(lowest_, criterion(summary_.responses[r].all, r));
      log_weights.push_back(log_weight(summary_.responses[r].all, r));
    }
    log_whole_ = log_of_sum(log_weights);
  }

  double cv_rmse(double cv_sse) const { return std::sqrt(cv_sse / n_held_out_); }
  judge::Reach reach(const search::Standing& standing, std::size_t response) const;
  /// `of` picks the same set out of each response form's summary.
  template <class Pick>
  judge::Standing standing(Pick of) const;
  std::optional<double> share(const std::vector<double>& log_weights) const;
  double log_weight(const search::Standing& standing, std::size_t response) const;

 private:
  double criterion(const search::Standing& standing, std::size_t response) const;
  bool has_density(std::size_t response) const { return std::isfinite(constants_.log_jacobian[response]); }

  const search::Summary& summary_;
  bool complete_;
  double n_rows_;
  double n_held_out_;
  const LikelihoodConstants& constants_;
  double lowest_ = kInfinity;
  double log_whole_ = -kInfinity;
};

/// −2ℓ + penalty, from RSS · exp(penalty / n).
double Translator::criterion(const search::Standing& standing, std::size_t response) const {
  if (!has_density(response)) return kInfinity;
  return n_rows_ * (std::log(2.0 * std::numbers::pi) + 1.0 + std::log(standing.best_penalised_rss / n_rows_)) -
         2.0 * (constants_.half_log_weights + constants_.log_jacobian[response]);
}

/// The logarithm of Σ exp(−criterion/2), up to what all response forms share.
double Translator::log_weight(const search::Standing& standing, std::size_t response) const {
  return has_density(response) ? standing.log_weight + constants_.log_jacobian[response] : -kInfinity;
}

judge::Reach Translator::reach(const search::Standing& standing, std::size_t response) const {
  judge::Reach reach;
  const double best = summary_.responses[response].all.best_cv_sse;
  if (std::isfinite(standing.best_cv_sse)) {
    reach.cv_rmse_form = to_digits(cv_rmse(standing.best_cv_sse));
    const double loss = standing.best_cv_sse == best ? 0.0 : std::sqrt(standing.best_cv_sse / best) - 1.0;
    reach.cv_loss_rel = finite(to_step(loss, kLossStep_rel));
  }
  const double value = criterion(standing, response);
  reach.criterion = finite(to_digits(to_step(value, kCriterionStep)));
  reach.criterion_loss = finite(to_step(value - lowest_, kCriterionStep));
  return reach;
}

std::optional<double> Translator::share(const std::vector<double>& log_weights) const {
  if (!complete_ || !std::isfinite(log_whole_)) return std::nullopt;
  return to_step(std::min(1.0, std::exp(log_of_sum(log_weights) - log_whole_)), kShareStep);
}

template <class Pick>
judge::Standing Translator::standing(Pick of) const {
  judge::Standing result;
  double lowest = kInfinity;
  std::vector<double> log_weights;
  for (std::size_t r = 0; r < summary_.responses.size(); ++r) {
    const search::Standing& own = of(summary_.responses[r]);
    result.by_response.push_back(reach(own, r));
    lowest = std::min(lowest, criterion(own, r));
    log_weights.push_back(log_weight(own, r));
  }
  result.criterion = finite(to_digits(to_step(lowest, kCriterionStep)));
  result.criterion_loss = finite(to_step(lowest - lowest_, kCriterionStep));
  result.weight_share = share(log_weights);
  return result;
}

judge::PredictorProfile predictor_profile(const Translator& translator, const design::Predictor& predictor,
                                          std::size_t j) {
  judge::PredictorProfile profile{predictor.column, predictor.always, {}, {}};
  const auto of_choice = [&](std::size_t choice) {
    return translator.standing([&](const search::ResponseSummary& summary) -> const auto& {
      return summary.of_choice[j][choice];
    });
  };
  for (std::size_t f = 0; f < predictor.menu.size(); ++f)
    profile.choices.push_back({predictor.menu[f], of_choice(1 + f)});
  const judge::Standing absent = of_choice(0);
  if (absent.weight_share) profile.weight_share = to_step(1.0 - *absent.weight_share, kShareStep);
  if (!predictor.always) profile.choices.push_back({std::nullopt, absent});
  return profile;
}

bool was_scored(const judge::Standing& standing) {
  return std::any_of(standing.by_response.begin(), standing.by_response.end(),
                     [](const judge::Reach& reach) { return reach.cv_rmse_form.has_value(); });
}

/// The occupied part of the walk's histogram; the walk's first bin begins at 0 and its last has no end.
judge::ScoreDistribution distribution(const Translator& translator, const std::vector<std::uint64_t>& histogram,
                                      double unit_sse) {
  const auto edge = [&](std::size_t bin) {
    if (bin == 0) return 0.0;
    if (bin == histogram.size()) return kInfinity;
    return to_digits(translator.cv_rmse(search::Summary::edge(bin) * unit_sse));
  };
  std::size_t first = 0, end = histogram.size();
  while (first < end && histogram[first] == 0) ++first;
  while (end > first && histogram[end - 1] == 0) --end;
  judge::ScoreDistribution scores;
  if (first == end) return scores;
  for (std::size_t bin = first; bin < end; ++bin) {
    scores.edges.push_back(edge(bin));
    scores.counts.push_back(histogram[bin]);
  }
  scores.edges.push_back(edge(end));
  return scores;
}

}  // namespace

Criterion summary_criterion(Criterion ranked_by) {
  return ranked_by == Criterion::cv_rmse ? Criterion::aic : ranked_by;
}

judge::SpaceSummary space_summary(const search::WalkResult& walked, const Prepared& prepared, Criterion ranked_by,
                                  const LikelihoodConstants& constants) {
  const search::Summary& summary = walked.summary;
  judge::SpaceSummary result;
  result.criterion = summary_criterion(ranked_by);
  if (summary.responses.empty()) return result;
  const Translator translator(walked, prepared, constants);
  for (std::size_t r = 0; r < summary.responses.size(); ++r) {
    const search::ResponseSummary& own = summary.responses[r];
    result.responses.push_back({translator.reach(own.all, r), translator.share({translator.log_weight(own.all, r)}),
                                distribution(translator, own.histogram, summary.unit_sse[r])});
  }
  for (std::size_t j = 0; j < prepared.data.predictors.size(); ++j)
    result.predictors.push_back(predictor_profile(translator, prepared.data.predictors[j], j));
  for (std::size_t terms = 0; terms <= prepared.data.predictors.size(); ++terms) {
    judge::Standing standing =
        translator.standing([&](const search::ResponseSummary& own) -> const auto& { return own.by_terms[terms]; });
    if (was_scored(standing)) result.by_terms.push_back({terms, std::move(standing)});
  }
  return result;
}

}  // namespace formsieve::pipeline

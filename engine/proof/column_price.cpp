#include "proof/column_price.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

ColumnPrice::ColumnPrice(const Frozen& frozen, std::size_t response)
    : root_(frozen.root),
      response_(response),
      best_columns_(std::min(frozen.best_columns, frozen.scope->most_columns)),
      most_columns_(frozen.scope->most_columns),
      aim_(std::isfinite(frozen.threshold) ? frozen.threshold : frozen.best_score) {
  const std::vector<double>& penalty = root_->problem().penalty;
  const std::size_t from = best_columns_ < most_columns_ ? best_columns_ : best_columns_ - (best_columns_ > 0 ? 1 : 0);
  if (from + 1 < penalty.size() && std::isfinite(penalty[from + 1])) step_ = penalty[from + 1] - penalty[from];
  constexpr double kSmallestStep = 1e-3;  // of a score: a flat penalty must not make λ zero
  step_ = std::max(step_, kSmallestStep) / static_cast<double>(root_->problem().grams->n_rows);
}

double ColumnPrice::tau(std::size_t n_columns) const {
  if (!std::isfinite(aim_)) return 1.0;
  const double log_rss = root_->log_rss(response_, aim_, std::min(n_columns, most_columns_));
  return std::exp(std::clamp(log_rss, std::log(kExactFit_rel), 0.0));
}

double ColumnPrice::at_best() const { return tau(best_columns_) * -std::expm1(-step_); }

double ColumnPrice::chord(std::size_t fewest, std::size_t most) const {
  if (fewest == most) {
    fewest -= fewest > 0 ? 1 : 0;
    most = std::min(most + 1, most_columns_);
  }
  const double slope = most > fewest ? (tau(fewest) - tau(most)) / static_cast<double>(most - fewest) : 0.0;
  return slope > 0.0 ? slope : at_best();
}

double ColumnPrice::within(double lambda, std::size_t fewest, std::size_t most) const {
  if (!(lambda > 0.0)) return chord(fewest, most);
  constexpr double kLowest = 0.3;
  constexpr double kHighest = 4.0;
  const double low = kLowest * tau(most) * -std::expm1(-step_);
  return std::clamp(lambda, low, std::max(low, kHighest * tau(fewest) * std::expm1(step_)));
}

double ColumnPrice::loss(std::size_t fewest, std::size_t most) const {
  const auto width = static_cast<double>(most - fewest);
  return step_ * step_ * width * width / 8.0 * static_cast<double>(root_->problem().grams->n_rows);
}

bool ColumnPrice::worth_splitting(std::size_t fewest, std::size_t most) const {
  return most - fewest >= 2 && loss(fewest, most) > kLossOfSplit;
}

}  // namespace formsieve::proof

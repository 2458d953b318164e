// The price of a column: λ of the relaxation.
#pragma once

#include "proof/node_work.hpp"

#include <cstddef>

namespace formsieve::proof {

/// The range of columns is split where one price loses more of a score than this.
inline constexpr double kLossOfSplit = 0.7;

/// RSS_rel that a candidate needs to reach the threshold, and what follows for λ.
class ColumnPrice {
 public:
  ColumnPrice(const Frozen& frozen, std::size_t response);

  /// τ_k = exp((threshold − penalty_k − …)/n); the best score where there is no threshold yet.
  double tau(std::size_t n_columns) const;
  /// Rise of the penalty by one column, over n, at the best candidate.
  double step() const { return step_; }
  /// RSS_rel(1 − exp(−step)) at the best candidate.
  double at_best() const;
  /// The slope of the chord of τ over the range.
  double chord(std::size_t fewest, std::size_t most) const;
  /// λ moved into the slopes that the range of columns leaves sensible.
  double within(double lambda, std::size_t fewest, std::size_t most) const;
  /// What one λ over the range loses: about (p·w)²/(8n) of a score, p the rise of the penalty and w the width.
  double loss(std::size_t fewest, std::size_t most) const;
  /// The range has more than two numbers and one price loses more than kLossOfSplit.
  bool worth_splitting(std::size_t fewest, std::size_t most) const;

 private:
  const RootGram* root_;
  std::size_t response_, best_columns_, most_columns_;
  double aim_;  ///< score
  double step_ = 0.0;
};

}  // namespace formsieve::proof

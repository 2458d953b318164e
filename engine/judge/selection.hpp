// Which ranked candidates become lines of the shortlist: gates, families, the Pareto front.
#pragma once

#include "judge/judge.hpp"

#include <cstddef>
#include <functional>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::judge {

/// Two candidates are alike when the root mean squared difference of their predictions is below this share of the
/// leader's CV RMSE: independent errors of that size would raise a held-out error by 0.1 % (√(1 + 0.05²) − 1), far less
/// than any fold can tell. On the demonstration table 25 lines then stand for the first 120 ranks; tables of fifty
/// rows, where forms do differ, keep nearly every candidate apart.
inline constexpr double kAlikeShare = 0.05;

/// √(mean (a_i − b_i)²); NaN where either has an undefined value, or when there are none. Cost O(n).
double root_mean_squared_difference(std::span<const double> a, std::span<const double> b);

/// Families as they are founded, best-ranked first. Undefined predictions, and leaders without a CV RMSE, are alike to
/// nothing.
class Families {
 public:
  /// `predictions` [rows] of the leader, own units, the same rows for all.
  void found(std::vector<double> predictions, std::optional<double> cv_rmse);
  /// The first family that such predictions belong to, in the order of founding. Cost O(families · rows).
  std::optional<std::size_t> home(std::span<const double> predictions) const;
  std::size_t size() const { return leaders_.size(); }

 private:
  struct Leader {
    std::vector<double> predictions;
    double limit = 0.0;
  };
  std::vector<Leader> leaders_;
};

/// Candidates that are asked about at once, so that the caller may work on them in parallel; fixed, so that what is
/// asked does not depend on the threads.
inline constexpr std::size_t kAskedAtOnce = 16;

/// What only the caller can say of a candidate, by its index in the ranked list.
struct Witness {
  /// Own-units predictions of these candidates on one set of rows; empty: no families are formed.
  std::function<std::vector<std::vector<double>>(std::span<const std::size_t>)> predictions;
  /// Learns whether these candidates pass the gates; empty: there are none.
  std::function<void(std::span<const std::size_t>)> examine_gates;
  /// Whether a candidate passes; may have to learn it first. Empty: all do.
  std::function<bool(std::size_t)> passes;
};

struct Line {
  std::size_t index = 0;              ///< into the ranked list
  std::vector<std::size_t> siblings;  ///< indices of its family, by rank
  bool is_sibling = false;            ///< a named line that belongs to the family of another line
};

struct Selection {
  std::vector<Line> lines;      ///< by rank
  std::size_t n_looked_at = 0;  ///< leading candidates placed in a family or set aside
};

/// Goes down the ranking until `n` lines are found or the list ends. A candidate alike to a line already found is its
/// sibling; any other becomes a line if it passes. Candidates with marks are lines always, and when they are alike to a
/// better line they are also counted among its siblings. Deterministic; what lies below the last line is not looked at.
Selection select(std::span<const Candidate> ranked, std::size_t n, const Witness& witness);

/// Checks that a candidate fails.
std::size_t n_failed(const Candidate& candidate);

/// Sets Candidate::pareto: no other of these candidates is as good or better by CV RMSE, number of terms and failed
/// checks, and better by one of them. Without a CV RMSE the error counts as infinite. Cost O(candidates²).
void mark_pareto(std::span<Candidate> listed);

}  // namespace formsieve::judge

// Room proof: the best candidates of a space by an information criterion, with a proof that no other is better, without
// visiting them. Knows nothing of files, text and statistics. May call: base, search (the space and its numbers).
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::proof {

/// An RSS below this share of the response's own sum of squares counts as just that: below it is rounding, and without
/// a floor every superset of an exact fit would have to be told apart.
inline constexpr double kExactFit_rel = 1e-12;

/// What is proved. The score of a candidate with k design columns, smaller is better:
///     n ln(RSS) + penalty[k] + constant[response],
/// RSS in the units of the Gram matrix and not below kExactFit_rel of the response's diagonal. AIC, AICc and BIC with
/// their Jacobian are of this shape: the constant takes the Jacobian, the response's scale and the weights.
struct Problem {
  const search::Space* space = nullptr;
  const base::GramSet* grams = nullptr;  ///< only `all` and the sizes are read
  std::vector<double> penalty;           ///< rising; by number of design columns 0 … most; may end in +infinity
  std::vector<double> constant;          ///< [n_responses]
};

/// Bit 0: the predictor may be absent; bit 1 + f: its form f may be used. At most kMostForms forms each.
using Actions = std::uint64_t;
inline constexpr std::size_t kMostForms = 63;

/// The Gram matrix of the problem with every column scaled to unit length and every response to unit sum of squares.
class RootGram {
 public:
  explicit RootGram(const Problem& problem);

  const Problem& problem() const { return *problem_; }
  const search::Space& space() const { return *problem_->space; }
  std::size_t n_predictors() const { return space().predictors.size(); }
  const Eigen::MatrixXd& gram() const { return gram_; }  ///< [n_columns × n_columns]
  /// [n_columns] cross-products with a response.
  auto products(std::size_t response) const { return products_.col(static_cast<Eigen::Index>(response)); }
  /// The score of an RSS relative to the response's own sum of squares, the floor applied; −infinity never.
  double score(std::size_t response, double rss_rel, std::size_t n_columns) const;
  /// ln(RSS_rel) at which a candidate of k columns has this score.
  double log_rss(std::size_t response, double score, std::size_t n_columns) const;
  /// All that every predictor may do at the root.
  std::vector<Actions> all_actions() const;

 private:
  const Problem* problem_;
  Eigen::MatrixXd gram_, products_;
  std::vector<double> offset_;  ///< [n_responses] constant + n ln(own sum of squares)
};

/// The canonical score of one candidate: a Cholesky factorisation of its columns in plan order, so that it is the same
/// bits however the candidate was met. +infinity where a pivot is not above search::kSmallestPivot_rel.
struct CandidateScore {
  double score;
  double rss_rel;
  std::size_t n_columns;
};
class CandidateScorer {
 public:
  explicit CandidateScorer(const RootGram& root) : root_(&root) {}
  CandidateScore operator()(std::size_t response, std::span<const std::uint16_t> choice);
  /// Whether every pivot exceeds this share of its column. More terms only lower the pivots of a candidate.
  bool separable(std::span<const std::uint16_t> choice, double smallest_pivot_rel);

 private:
  void gather(std::span<const std::uint16_t> choice);
  /// RSS_rel of columns_, or +infinity at the first pivot that is too small. Cost k³ / 3.
  double eliminate(std::size_t response, double smallest_pivot_rel);

  const RootGram* root_;
  std::vector<std::size_t> columns_;
  std::vector<double> lower_;
};

}  // namespace formsieve::proof

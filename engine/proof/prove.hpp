// Branch and bound over the actions of the predictors: the best candidates with a proof.
#pragma once

#include "proof/problem.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <limits>
#include <optional>
#include <span>
#include <stop_token>
#include <utility>
#include <vector>

namespace formsieve::proof {

/// Which candidates a proof speaks of. Empty: all of them.
struct Restriction {
  std::optional<std::size_t> response;
  std::vector<std::pair<std::size_t, Actions>> actions;  ///< predictor, what it may still do
  std::size_t fewest_terms = 0;
  std::size_t most_terms = std::numeric_limits<std::size_t>::max();  ///< besides Space::max_terms
};

/// What is known after a batch of nodes.
struct Progress {
  std::uint64_t nodes = 0;
  std::size_t open_nodes = 0;
  double best_score = std::numeric_limits<double>::infinity();
  double lower_bound = -std::numeric_limits<double>::infinity();  ///< of every candidate that is not listed
};

struct Certificate;  // certificate.hpp
struct WarmStart;    // warm_start.hpp

struct Limits {
  std::size_t keep = 100;  ///< candidates listed at most
  /// Candidates whose score lies further above the best are not listed.
  double within = std::numeric_limits<double>::infinity();
  std::uint64_t nodes = std::numeric_limits<std::uint64_t>::max();
  unsigned threads = 0;  ///< 0: all that the process may use
  std::stop_token stop;
  /// Asked between evaluations of bounds, from several threads; true ends the proof. A limit of time belongs here. May
  /// be empty.
  std::function<bool()> enough;
  std::function<void(const Progress&)> progress;  ///< called between batches; may be empty
  /// Where the roots begin; may be null. What is proved does not depend on it, only how soon.
  const WarmStart* start = nullptr;
  /// Where the proof is to be written down; may be null. Takes memory for a matrix of the order of the open columns and
  /// more for every bound.
  Certificate* certificate = nullptr;
};

struct Listed {
  search::Choice choice;
  double score = 0.0;
  double rss_rel = 1.0;
  std::size_t n_columns = 0;
};

/// A node is cut only where its bound lies above the list's threshold by more than this: it covers what rounding may do
/// to a score (which is at most 1e-9 or so while pivots are above search::kSmallestPivot_rel); what rounding may do to
/// a bound is subtracted from the bound itself (bound.hpp).
inline constexpr double kTolerance = 1e-7;

struct Proof {
  std::vector<Listed> best;  ///< best first, ties by candidate number; the same for any number of threads once proved
  /// True: every candidate that is not listed scores at least `lower_bound` and that is the threshold: the score of the
  /// last listed when the list is full, the best + within otherwise.
  bool proved = false;
  double lower_bound = -std::numeric_limits<double>::infinity();  ///< of every candidate that is not listed
  std::vector<double> response_lower_bound;                       ///< [n_responses] the same for each response form
  bool full = false;  ///< `keep` candidates are listed: there may be more within
  std::uint64_t nodes = 0;
};

/// Cost: a node takes a few Cholesky factorisations of the order of its open columns, or a few of order
/// Newton::n_variables; how many nodes depends on the data. `hints` are candidates to begin with, in any order.
Proof prove(const RootGram& root, const Restriction& restriction, const Limits& limits,
            std::span<const search::Choice> hints = {});

}  // namespace formsieve::proof

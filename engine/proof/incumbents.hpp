// Good candidates without a proof: descent by single changes and the closure of the list under them.
#pragma once

#include "proof/problem.hpp"
#include "proof/scope.hpp"
#include "proof/shortlist.hpp"
#include "proof/single_changes.hpp"

#include <cstddef>
#include <functional>
#include <set>
#include <vector>

namespace formsieve::proof {

class Incumbents {
 public:
  /// `expired` is asked between descents and entries; once true, nothing more is done.
  Incumbents(const RootGram& root, const Scope& scope, Shortlist& list, std::function<bool()> expired);

  /// Descends from the smallest and from a large candidate of every response form, then closes the list.
  void start();
  /// Offers a candidate; where it is listed, or `force`, descends from it and closes the list about it.
  void improve(const search::Choice& candidate, bool force);

 private:
  bool offer(const search::Choice& candidate);
  void descend(search::Choice at);
  void close(std::size_t most_entries);
  std::size_t affordable_looks() const;
  void offer_changes(const search::Choice& from);

  const RootGram* root_;
  const Scope* scope_;
  Shortlist* list_;
  std::function<bool()> expired_;
  CandidateScorer scorer_;
  SingleChanges changes_;
  using Seen = std::set<std::pair<std::size_t, std::vector<std::uint16_t>>>;
  Seen descended_from_;
  Seen looked_at_;  ///< their single changes were offered
};

}  // namespace formsieve::proof
